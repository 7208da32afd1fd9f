/** What `bendwatch calibrate` can find: the procedure of each kind, and how its result reads and is kept. */
import type { BodyPose } from "../calibration/body-pose.ts";
import { Mounting, type MountingNumbers } from "../calibration/mounting.ts";
import type { Outcome, Procedure } from "../calibration/procedure.ts";
import { RestBias, type RestNumbers } from "../calibration/rest.ts";
import { SixPositions, type SixPositionsNumbers } from "../calibration/six-positions.ts";
import { TurnThrough, type TurnThroughNumbers } from "../calibration/turn-through.ts";
import { siteField } from "../health/site-field.ts";
import { normalGravity } from "../numeric/gravity.ts";
import { STANDARD_GRAVITY } from "../numeric/units.ts";
import type { CalibrationRecord } from "../rig/calibration-record.ts";
import type { Rig } from "../rig/load.ts";

export type CalibrationKind = CalibrationRecord["kind"];

export interface CalibrationAim {
  readonly rig: Rig;
  readonly date: Date;
  readonly poses: readonly BodyPose[];
  readonly bend: boolean;
  /** rad, or null. */
  readonly bearing: number | null;
}

/** What a record holds of a result. */
type Kept = Pick<CalibrationRecord, "calibration" | "mounting" | "merits">;

/** What came out for one sensor, as it is told and kept. */
export type TaskOutcome =
  | { readonly ok: true; readonly text: string; readonly kept: Kept; readonly warnings: readonly string[] }
  | { readonly ok: false; readonly reason: string };

export interface CalibrationTask {
  readonly procedure: Pick<Procedure<unknown>, "observe" | "progress">;
  /** One a sensor. */
  outcomes(): readonly TaskOutcome[];
}

/** Binds a procedure to how its numbers are told and kept. */
function task<Numbers>(
  procedure: Procedure<Numbers>,
  describe: (numbers: Numbers) => string,
  keep: (numbers: Numbers) => Kept,
): CalibrationTask {
  const told = (outcome: Outcome<Numbers>): TaskOutcome =>
    outcome.ok
      ? { ok: true, text: describe(outcome.numbers), kept: keep(outcome.numbers), warnings: outcome.warnings }
      : outcome;
  return { procedure, outcomes: () => procedure.result().map(told) };
}

const list = (values: readonly number[], digits: number) =>
  values.map((value) => value.toFixed(digits)).join(", ");

export const TASKS: Readonly<Record<CalibrationKind, (aim: CalibrationAim) => CalibrationTask>> = {
  rest: ({ rig }) =>
    task(
      new RestBias(rig.sensors, rig.models, rig.hub.rateHz),
      ({ gyroBiasDegPerS, sigmaDegPerS }: RestNumbers) =>
        `gyroscope bias ${list(gyroBiasDegPerS, 4)} °/s, each ± ${sigmaDegPerS.toFixed(4)}`,
      ({ gyroBiasDegPerS, sigmaDegPerS, stillS }) => ({
        calibration: { gyroBiasDegPerS: [...gyroBiasDegPerS] },
        merits: { sigmaDegPerS, stillS },
      }),
    ),

  "six-positions": ({ rig }) =>
    task(
      new SixPositions(rig.sensors, rig.models, rig.hub.rateHz, gravityAt(rig)),
      ({ accelBiasMPerS2, accelScale, sigmaBiasMPerS2, sigmaScale }: SixPositionsNumbers) =>
        `accelerometer bias ${list(accelBiasMPerS2, 3)} m/s² ± ${sigmaBiasMPerS2.toFixed(3)}, scale ${list(accelScale, 4)} ± ${sigmaScale.toFixed(4)}`,
      ({ accelBiasMPerS2, accelScale, ...merits }) => ({
        calibration: { accelBiasMPerS2: [...accelBiasMPerS2], accelScale: [...accelScale] },
        merits: { ...merits, gravityMPerS2: gravityAt(rig) },
      }),
    ),

  "turn-through": ({ rig, date }) =>
    task(
      new TurnThrough(rig.sensors, rig.models, fieldAt(rig, date)),
      ({ magHardIronUT, sigmaHardIronUT, residualUT, coverage }: TurnThroughNumbers) =>
        `hard iron ${list(magHardIronUT, 2)} µT ± ${sigmaHardIronUT.toFixed(2)}, residual ${residualUT.toFixed(2)} µT, ${Math.round(coverage * 100)} % of all directions`,
      ({ magHardIronUT, magSoftIron: [x, y, z], ...merits }) => ({
        calibration: { magHardIronUT: [...magHardIronUT], magSoftIron: [[...x], [...y], [...z]] },
        merits,
      }),
    ),

  mounting: ({ rig, poses, bend, bearing }) =>
    task(
      new Mounting({
        sensors: rig.sensors,
        models: rig.models,
        rateHz: rig.hub.rateHz,
        lengthM: rig.body.lengthMm / 1000,
        poses,
        bend,
        bearing,
        accelBiases: accelBiases(rig),
      }),
      ({ yawDeg, pitchDeg, rollDeg, sigmaDeg }: MountingNumbers) =>
        `yaw ${yawDeg.toFixed(2)}°, pitch ${pitchDeg.toFixed(2)}°, roll ${rollDeg.toFixed(2)}°, ± ${sigmaDeg.toFixed(2)}°`,
      ({ yawDeg, pitchDeg, rollDeg, sigmaDeg }) => ({
        calibration: {},
        mounting: { yawDeg, pitchDeg, rollDeg },
        merits: { sigmaDeg },
      }),
    ),
};

/** At the rig's site; standard gravity where it names none, wrong by up to 0.3 %. */
function gravityAt({ site }: Rig): number {
  return site ? normalGravity(site.latitudeDeg, site.heightM) : STANDARD_GRAVITY;
}

function fieldAt({ site }: Rig, date: Date): number | null {
  return site ? siteField(site, site.date ? new Date(site.date) : date).normUT : null;
}

/** How well each accelerometer's bias is known where it was calibrated. */
function accelBiases({ sensors, recordsUsed }: Rig): (number | null)[] {
  return sensors.map(({ name }) => {
    const record = recordsUsed.find(({ sensor, kind }) => sensor === name && kind === "six-positions");
    return record?.merits.sigmaBiasMPerS2 ?? null;
  });
}
