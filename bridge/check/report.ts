/**
 * The report of a release check as a value: everything in it follows from the recording and the software's version, so
 * that whoever has the recording can work it out again and compare.
 */
import type { UsedRecord } from "../rig/calibration-record.ts";
import type { Rig } from "../rig/load.ts";
import type { SensorPlace } from "../rig/rig.ts";
import type { CheckFigure, CheckReason, CheckStepView, CheckVerdict } from "../wire/check.ts";
import type { Flag } from "../wire/flag.ts";
import { stepCautions, verdictCautions } from "./cautions.ts";
import type { ReleaseCheck } from "./release-check.ts";
import type { SupplyPoint } from "./supply.ts";

/** The recording that a report is of. */
export interface Recording {
  readonly trial: string;
  /** ISO 8601. */
  readonly startedAt: string;
  /** Version that recorded it. */
  readonly softwareVersion: string;
  readonly origin: string;
  readonly notes: string;
  /** Of packets.cborseq. */
  readonly sha256: string;
  readonly bytes: number;
  /** Why it is not whole; null where it is. */
  readonly problem: string | null;
}

/** Sensors by name; null for the whole rig. */
type Named<T extends { readonly sensor: number }> = Omit<T, "sensor"> & { readonly sensor: string | null };

export interface ReportStep extends Omit<CheckStepView, "figures" | "faults" | "missing"> {
  readonly cautions: readonly string[];
  readonly figures: readonly Named<CheckFigure>[];
  readonly faults: readonly Named<CheckReason>[];
  readonly missing: readonly Named<CheckReason>[];
}

export interface CheckReport {
  readonly formatVersion: 1;
  readonly verdict: CheckVerdict;
  readonly reasons: readonly {
    readonly steps: readonly string[];
    readonly sensor: string | null;
    readonly text: string;
  }[];
  readonly cautions: readonly string[];
  readonly operator: string;
  /** ISO 8601 by the computer's clock; null where the check was never begun or ended. */
  readonly begunAt: string | null;
  readonly endedAt: string | null;
  /** That worked this report out. */
  readonly softwareVersion: string;
  readonly recording: Recording;
  readonly rig: {
    readonly name: string;
    readonly notes: string;
    readonly body: Rig["body"];
    readonly rateHz: number;
  };
  readonly sensors: readonly ReportSensor[];
  readonly steps: readonly ReportStep[];
  readonly flags: readonly Named<
    Pick<Flag, "kind" | "sensor" | "severity" | "startS" | "endS" | "detail" | "advice">
  >[];
  readonly limits: Rig["checkLimits"];
  readonly thresholds: Rig["thresholds"];
  readonly traces: {
    /** Directions of which the field was seen, by sensor: cells of bridge/calibration/sphere.ts. */
    readonly seen: readonly (readonly boolean[])[];
    /** Hub time, s; supply, V; temperature, °C. */
    readonly supply: readonly SupplyPoint[];
  };
}

export interface ReportSensor {
  readonly name: string;
  readonly serial: string;
  readonly station: number;
  readonly model: string;
  /** On purpose. */
  readonly takenOut: boolean;
  readonly mounting: SensorPlace["mounting"];
  readonly calibration: SensorPlace["calibration"];
  /** Records that these come from. */
  readonly records: readonly Omit<UsedRecord, "sensor">[];
}

/** @param softwareVersion of the software that runs */
export function reportOf(
  check: ReleaseCheck,
  rig: Rig,
  recording: Recording,
  softwareVersion: string,
): CheckReport {
  const named = <T extends { readonly sensor: number }>(item: T): Named<T> => ({
    ...item,
    sensor: item.sensor < 0 ? null : rig.sensors[item.sensor]!.name,
  });
  const { begun, ended } = check.hostTimesMs;
  const { verdict, reasons } = check.verdict();
  const broken = recording.problem === null ? [] : [{ steps: [], sensor: null, text: recording.problem }];
  return {
    formatVersion: 1,
    verdict: verdict === "go" && broken.length > 0 ? "incomplete" : verdict,
    reasons: [
      ...reasons.map(({ steps, sensor, text }) => ({ steps, ...named({ sensor, text }) })),
      ...broken,
    ],
    cautions: verdictCautions(rig.body.kind),
    operator: check.operator,
    begunAt: begun === null ? null : new Date(begun).toISOString(),
    endedAt: ended === null ? null : new Date(ended).toISOString(),
    softwareVersion,
    recording,
    rig: { name: rig.name, notes: rig.notes, body: rig.body, rateHz: rig.hub.rateHz },
    sensors: rig.sensors.map((sensor, i) => ({
      name: sensor.name,
      serial: sensor.serial,
      station: sensor.station,
      model: rig.models[i]!.name,
      takenOut: check.isOut[i]!,
      mounting: sensor.mounting,
      calibration: sensor.calibration,
      records: rig.recordsUsed
        .filter((record) => record.sensor === sensor.name)
        .map(({ sensor: _, ...record }) => record),
    })),
    steps: check.steps().map((view) => ({
      ...view,
      cautions: stepCautions(view.step, rig.body.kind),
      figures: view.figures.map(named),
      faults: view.faults.map(named),
      missing: view.missing.map(named),
    })),
    flags: check.flags.map(({ kind, sensor, severity, startS, endS, detail, advice }) =>
      named({ kind, sensor, severity, startS, endS, detail, advice }),
    ),
    limits: rig.checkLimits,
    thresholds: rig.thresholds,
    traces: check.traces(),
  };
}

/** The report's file: JSON, the same text for the same recording and version. */
export function reportText(report: CheckReport): string {
  return `${JSON.stringify(report, null, 2)}\n`;
}
