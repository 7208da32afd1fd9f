/**
 * What one tailbeat cycle comes to: every number, what there is to doubt in it, and how it has scattered.
 *
 * All come from the fit of mean and three harmonics to the sweeps of exactly this cycle (cycle-fit.ts), across the
 * travel axis, except the frequency, which is one over the time between the tail's two crossings.
 *
 *     tailAmplitudeM, headAmplitudeM   peak to peak of the tail tip and of the nose
 *     phaseLag, wavelengthM            phase-along-body.ts
 *     waveSpeedMPerS                   wavelength times frequency, along the body
 *     travellingIndex                  travelling-index.ts
 *     meanBend                         heading of the first piece of the midline less that of the last, seen from above,
 *                                      averaged over the cycle, rad; positive with the nose turned left
 *     strouhal                         frequency times tail amplitude over flow speed
 *     slip                             flow speed over wave speed
 *     reynolds                         flow speed times body length over kinematic viscosity
 */
import { GAIT_NUMBERS, type GaitNumbers, gaitNumbers } from "../wire/gait.ts";

export interface GaitCycle {
  /** Hub time, s. */
  startS: number;
  endS: number;
  sweeps: number;
  /** Half of peak to peak across the travel axis, m, a point; NaN where the cycle could not be fitted. */
  readonly envelopeM: Float64Array;
  /** NaN where a number is not known. */
  readonly numbers: GaitNumbers;
  /** DOUBT bits; a number is to be trusted when they are 0. */
  readonly doubts: GaitNumbers;
  /** Standard deviation over the last cycles, this one included, of those to be trusted; NaN of fewer than two. */
  readonly spread: GaitNumbers;
}

export function createGaitCycle(points: number): GaitCycle {
  return {
    startS: 0,
    endS: 0,
    sweeps: 0,
    envelopeM: new Float64Array(points),
    numbers: gaitNumbers(Number.NaN),
    doubts: gaitNumbers(0),
    spread: gaitNumbers(Number.NaN),
  };
}

/** The numbers of the last cycles, for their spread. */
export class RecentCycles {
  readonly #cycles: number;
  /** A row a cycle, in the order of GAIT_NUMBERS; NaN where not to be trusted. */
  readonly #rows: Float64Array;
  #count = 0;

  constructor(cycles: number) {
    this.#cycles = cycles;
    this.#rows = new Float64Array(cycles * GAIT_NUMBERS.length);
  }

  /** Takes a cycle in and writes its `spread`. */
  add({ numbers, doubts, spread }: GaitCycle): void {
    const row = (this.#count % this.#cycles) * GAIT_NUMBERS.length;
    this.#count++;
    GAIT_NUMBERS.forEach((name, i) => {
      this.#rows[row + i] = doubts[name] === 0 ? numbers[name] : Number.NaN;
      spread[name] = this.#deviation(i);
    });
  }

  /** The body has stopped: what comes next is another movement. */
  clear(): void {
    this.#count = 0;
  }

  #deviation(column: number): number {
    const end = Math.min(this.#count, this.#cycles) * GAIT_NUMBERS.length;
    let known = 0;
    let sum = 0;
    for (let at = column; at < end; at += GAIT_NUMBERS.length) {
      if (Number.isNaN(this.#rows[at])) continue;
      known++;
      sum += this.#rows[at];
    }
    if (known < 2) return Number.NaN;
    const mean = sum / known;
    let squares = 0;
    for (let at = column; at < end; at += GAIT_NUMBERS.length) {
      if (!Number.isNaN(this.#rows[at])) squares += (this.#rows[at] - mean) ** 2;
    }
    return Math.sqrt(squares / (known - 1));
  }
}
