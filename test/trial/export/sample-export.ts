/** An export of an invented trial, for the tests of its tables and of its description. */
import { join } from "node:path";
import { emptyCounters } from "../../../bridge/link/packets.ts";
import { RunningSpread } from "../../../bridge/numeric/running-spread.ts";
import { loadRig } from "../../../bridge/rig/load.ts";
import { TRUST } from "../../../bridge/sweep.ts";
import { type ExportSummary, ExportWriter } from "../../../bridge/trial/export/export-writer.ts";
import type { ExportedBout, ExportedCycle } from "../../../bridge/trial/export/gait-tables.ts";
import { STATION_COUNT } from "../../../bridge/trial/export/tables.ts";
import type { Flag } from "../../../bridge/wire/flag.ts";
import { DOUBT, GAIT_NUMBERS, type GaitNumbers, gaitNumbers } from "../../../bridge/wire/gait.ts";
import { temporaryFolder } from "../fixtures.ts";

export const rig = loadRig("ribbon-foil");
export const SENSORS = rig.sensors.length;

const BESIDE = { rmse: 0.01, rmseLagRemoved: 0.002, r2: 0.99 };

export const summary: ExportSummary = {
  startedAt: "2026-06-01T09:30:00.000Z",
  notes: "",
  lostSweeps: 5,
  sweepsBy: { wave: 15, "smooth: not beating": 5 },
  counters: { ...emptyCounters(), good: 20 },
  drive: [
    { ...BESIDE, sensor: 1, station: 0.24, against: "yaw", gain: 0.98765, lagS: 0.0123456 },
    { ...BESIDE, sensor: -1, station: 1, against: "sway", gain: Number.NaN, lagS: Number.NaN },
  ],
  settings: { heading: "magnetic" },
};

const flag: Flag = {
  id: 2,
  kind: "low headroom",
  sensor: 3,
  severity: "caution",
  startS: 0.05,
  endS: null,
  detail: "7 % left on y",
  advice: "Use a wider range.",
};

/** A good cycle, and one whose nose does not swing, without a known phase lag, in a still tank. */
function cycles(): [ExportedCycle, ExportedCycle] {
  const numbers: GaitNumbers = {
    frequencyHz: 8,
    tailAmplitudeM: 0.0451234,
    headAmplitudeM: 0.0128,
    phaseLag: Math.PI,
    wavelengthM: 0.6,
    waveSpeedMPerS: 4.8,
    travellingIndex: 0.75,
    meanBend: -Math.PI / 90,
    strouhal: 0.3,
    slip: 0.25,
    reynolds: 812_345.6,
  };
  const envelopeM = Float64Array.from({ length: STATION_COUNT }, (_, i) => 0.0005 * i);
  const good = { startS: 0.02, endS: 0.145, envelopeM, numbers, doubts: gaitNumbers(0) };
  const still = { ...numbers, phaseLag: Number.NaN, strouhal: Number.NaN };
  const doubts = {
    ...gaitNumbers(0),
    headAmplitudeM: DOUBT.BELOW_NOISE,
    phaseLag: DOUBT.BELOW_NOISE | DOUBT.BRIDGED,
    strouhal: DOUBT.NO_FLOW_SPEED,
  };
  return [
    { ...good, spread: { ...gaitNumbers(Number.NaN), frequencyHz: 0.08 } },
    { ...good, startS: 0.145, endS: 0.27, numbers: still, doubts, spread: gaitNumbers(Number.NaN) },
  ];
}

/** Of two cycles at 7.9 and 8.1 beats a second; nothing else to be trusted. */
function bout(): ExportedBout {
  const numbers = Object.fromEntries(GAIT_NUMBERS.map((name) => [name, new RunningSpread()]));
  numbers.frequencyHz!.add(7.9);
  numbers.frequencyHz!.add(8.1);
  return { startS: 0.02, endS: 0.27, cycles: 2, numbers: numbers as ExportedBout["numbers"] };
}

export function createWriter(folder: string, overwrite = false): ExportWriter {
  return new ExportWriter({ folder, trialName: "Trial 7", rig, softwareVersion: "0.1.0", overwrite });
}

/** Sweeps of a straight body bending a little more each sweep, all sensors turned left by 90 degrees. */
export function writeSweeps(writer: ExportWriter, count: number): void {
  const midline = new Float64Array(STATION_COUNT * 3);
  const orientations = new Float64Array(SENSORS * 4);
  const trust = new Uint8Array(SENSORS).fill(TRUST.GOOD);
  const bridged = new Uint8Array(SENSORS);
  trust[1] = TRUST.HEADING_UNAIDED;
  bridged[2] = 1;
  for (let sensor = 0; sensor < SENSORS; sensor++) {
    orientations[4 * sensor] = Math.SQRT1_2;
    orientations[4 * sensor + 3] = Math.SQRT1_2;
  }
  for (let n = 0; n < count; n++) {
    for (let i = 0; i < STATION_COUNT; i++) {
      midline[3 * i] = -0.016 * i;
      midline[3 * i + 1] = 0.0001 * n * i;
    }
    writer.sweep(n / 100, midline, orientations, trust, bridged);
  }
}

/** All tables, some of them with awkward texts. */
export function writeAll(folder: string, overwrite = false): void {
  const writer = createWriter(folder, overwrite);
  writer.sync(0.03, 17);
  writer.sync(0.5, 18);
  writeSweeps(writer, 20);
  writer.flag(flag);
  writer.flag({ ...flag, id: 1, kind: "link silent", sensor: -1, detail: "=gone, 0.4 s" });
  writer.flag({ ...flag, endS: 0.15, severity: "alarm" });
  for (const cycle of cycles()) writer.beat(cycle);
  writer.bout(bout());
  writer.mark({ timeS: 0.1, text: 'said "go"', from: "operator" });
  writer.reference(0.02, Math.PI / 6, -0.0041);
  writer.reference(0.03, Number.NaN, 0);
  writer.finish(summary);
}

export function exported(): string {
  const folder = join(temporaryFolder(), "export");
  writeAll(folder);
  return folder;
}
