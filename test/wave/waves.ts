/** Bodies that move as written down, given to a GaitMeter sweep by sweep. */

import { TRUST } from "../../bridge/sweep.ts";
import { GaitMeter, type GaitOptions } from "../../bridge/wave/gait.ts";
import type { GaitCycle } from "../../bridge/wave/gait-cycle.ts";
import type { Bout } from "../../bridge/wave/steady-bout.ts";

export const LENGTH_M = 0.64;
export const POINTS = 41;
export const STATIONS = [0.04, 0.22, 0.41, 0.6, 0.78, 0.96];

/** Lateral position of station `x` (0 nose to 1 tail tip) at a time, m. */
export type Motion = (x: number, t: number) => number;

/** The amplitudes of a mackerel as in bridge/rehearsal/body-wave.ts, a share of the length. */
export const carangiform = (x: number) => 0.02 - 0.08 * x + 0.16 * x * x;

/** a(x) sin(2 pi (f t - x / wavelength)), wavelength as a share of the length. */
export function travelling(frequencyHz: number, wavelength: number, amplitude = carangiform): Motion {
  return (x, t) => LENGTH_M * amplitude(x) * Math.sin(2 * Math.PI * (frequencyHz * t - x / wavelength));
}

/** Evenly spread pseudo-noise in -1..1 (Park & Miller 1988), the same every time. */
export function noise(): () => number {
  let n = 20_240_501;
  return () => {
    n = (n * 16_807) % 2_147_483_647;
    return (2 * n) / 2_147_483_647 - 1;
  };
}

export interface Watched {
  readonly meter: GaitMeter;
  readonly cycles: GaitCycle[];
  readonly bouts: Bout[];
}

export interface WatchOptions extends Partial<Omit<GaitOptions, "onCycle" | "onBout">> {
  readonly seconds?: number;
  /** Direction the body points, rad from east. */
  readonly heading?: number;
  /** Whether the sweep of this number never comes. */
  readonly lost?: (sweep: number) => boolean;
  /** Trust of each sensor. */
  readonly trust?: (t: number) => readonly number[];
}

/** Runs a motion through a meter and keeps copies of what it tells. */
export function watch(motion: Motion, options: WatchOptions = {}): Watched {
  const { seconds = 20, heading = 0.7, lost = () => false, rateHz = 100, stations = STATIONS } = options;
  const good = stations.map(() => TRUST.GOOD);
  const { trust = () => good } = options;
  const cycles: GaitCycle[] = [];
  const bouts: Bout[] = [];
  const meter = new GaitMeter({
    rateHz,
    lengthM: LENGTH_M,
    pointCount: POINTS,
    flowMPerS: 0.5,
    viscosityM2PerS: 1e-6,
    spreadCycles: 10,
    steady: { frequencyShare: 0.05, amplitudeShare: 0.1, cycles: 3 },
    ...options,
    stations,
    onCycle: (cycle) => cycles.push(structuredClone(cycle)),
    onBout: (bout) => bouts.push(bout),
  });
  const positions = new Float64Array(3 * POINTS);
  const axis = Float64Array.of(Math.cos(heading), Math.sin(heading));
  for (let sweep = 0; sweep < seconds * rateHz; sweep++) {
    if (lost(sweep)) continue;
    const t = sweep / rateHz;
    for (let point = 0; point < POINTS; point++) {
      const x = point / (POINTS - 1);
      const along = -x * LENGTH_M;
      const across = motion(x, t);
      positions[3 * point] = axis[0] * along - axis[1] * across;
      positions[3 * point + 1] = axis[1] * along + axis[0] * across;
    }
    meter.step(t, positions, axis, Uint8Array.from(trust(t)));
  }
  meter.finish();
  return { meter, cycles, bouts };
}

/** The last cycle: the mean line and the travel axis have settled. */
export function lastCycle(motion: Motion, options?: WatchOptions): GaitCycle {
  return watch(motion, options).cycles.at(-1)!;
}
