/**
 * A chain of sensors beside a drive, without packets: each sensor's yaw is a known gain and lag of the drive's, the
 * midline's displacement one of its sway. Seeded noise, jitter and losses.
 */
import { DriveComparison, type ReferenceSettings } from "../../bridge/drive/drive-comparison.ts";
import { Random } from "../../bridge/rehearsal/random.ts";

export interface DrivenOptions {
  /** The drive's yaw, rad. */
  readonly yaw: (timeS: number) => number;
  readonly gains: readonly number[];
  readonly lagsS: readonly number[];
  readonly seconds?: number;
  readonly sweepHz?: number;
  readonly referenceHz?: number;
  /** Of both intervals, as a share of them. */
  readonly jitter?: number;
  readonly lostShare?: number;
  /** RMS of a sensor's yaw, rad. */
  readonly noise?: number;
  readonly settings?: Partial<ReferenceSettings>;
  readonly seed?: number;
  readonly onReference?: (timeS: number, yaw: number, sway: number) => void;
  /** After each sweep. */
  readonly eachSweep?: (drive: DriveComparison, timeS: number) => void;
}

export const SETTINGS: ReferenceSettings = {
  station: 0,
  yawReversed: false,
  yawZeroDeg: 0,
  swayReversed: false,
  swayZeroMm: 0,
  delayMs: 0,
};
/** Sway goes with yaw. */
export const SWAY_M_PER_RAD = 0.1;
export const MIDLINE_GAIN = 1.5;
export const MIDLINE_LAG_S = 0.03;
const POINTS = 41;

export function driven(options: DrivenOptions): DriveComparison {
  const { yaw, gains, lagsS, seconds = 20, sweepHz = 100, referenceHz = 100, noise = 0 } = options;
  const { jitter = 0, lostShare = 0, seed = 1, eachSweep = () => {} } = options;
  const random = Random.forStream(seed, 0);
  const drive = new DriveComparison({
    reference: { ...SETTINGS, ...options.settings },
    stations: gains.map((_, i) => (i + 0.5) / gains.length),
    rateHz: sweepHz,
    ...(options.onReference === undefined ? {} : { onReference: options.onReference }),
  });
  const events = [
    ...times(sweepHz, 0).map((timeS) => ({ timeS, isSweep: true })),
    // Ticks of the drive fall between those of the sweeps.
    ...times(referenceHz, 0.37).map((timeS) => ({ timeS, isSweep: false })),
  ].sort((a, b) => a.timeS - b.timeS);
  const orientations = new Float64Array(4 * gains.length);
  const positions = new Float64Array(3 * POINTS);
  for (const { timeS, isSweep } of events) {
    if (!isSweep) drive.reference(timeS, yaw(timeS), SWAY_M_PER_RAD * yaw(timeS));
    else {
      gains.forEach((gain, i) => {
        const half = 0.5 * (gain * yaw(timeS - lagsS[i]) + noise * random.normal());
        orientations.set([Math.cos(half), 0, 0, Math.sin(half)], 4 * i);
      });
      const sideways = MIDLINE_GAIN * SWAY_M_PER_RAD * yaw(timeS - MIDLINE_LAG_S);
      for (let point = 0; point < POINTS; point++) positions[3 * point + 1] = sideways;
      drive.sweep(timeS, orientations, new Uint8Array(gains.length), positions, 0);
      eachSweep(drive, timeS);
    }
  }
  return drive;

  function times(rateHz: number, phase: number): number[] {
    return Array.from({ length: Math.round(seconds * rateHz) }, (_, i) => {
      const shift = jitter * (random.uniform() - 0.5);
      return (i + phase + shift) / rateHz;
    }).filter(() => random.uniform() >= lostShare);
  }
}
