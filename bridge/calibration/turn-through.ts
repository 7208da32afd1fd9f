/**
 * Magnetometer: hard and soft iron from readings while the sensor, with all that is fixed to it, is turned through as many
 * directions as can be. Says how much of the sphere of directions was covered and what is missing, and refuses too little.
 */
import type { SensorPlace } from "../rig/rig.ts";
import type { SensorModel } from "../rig/sensor-model.ts";
import { CHANNELS, HAS_MAG, MAG, type Sweep } from "../sweep.ts";
import { type EllipsoidFit, fitEllipsoid } from "./ellipsoid.ts";
import { type Outcome, type Procedure, type Progress, refused } from "./procedure.ts";
import { CELLS, cellOf, describeMissing, shareSeen } from "./sphere.ts";

type Triple = readonly [number, number, number];

export interface TurnThroughNumbers {
  readonly magHardIronUT: Triple;
  readonly magSoftIron: readonly [Triple, Triple, Triple];
  /** Figures of merit: standard deviations of the worst axis and element, the lengths' RMS residual, share of the sphere. */
  readonly sigmaHardIronUT: number;
  readonly sigmaSoftIron: number;
  readonly residualUT: number;
  readonly coverage: number;
}

/** A reading is kept when it lies this far from the last one kept: a sensor at rest adds nothing. µT */
const APART_UT = 2;
const MOST_READINGS = 3000;
/** Share of them that has to be seen, and that is enough. Half a sphere leaves the far side's centre to the model. */
const LEAST_COVERAGE = 0.5;
const ENOUGH_COVERAGE = 0.8;
/** Beyond these the readings lie on no ellipsoid, or do not tell it: µT and share. */
const LARGEST_RESIDUAL_NOISES = 4;
const LARGEST_SIGMA_UT = 0.5;
const LARGEST_SIGMA_SHARE = 0.02;
export class TurnThrough implements Procedure<TurnThroughNumbers> {
  readonly #models: readonly SensorModel[];
  readonly #fieldUT: number | null;
  /** sensors x MOST_READINGS x 3. */
  readonly #readings: Float64Array;
  readonly #count: Uint32Array;

  /** @param fieldUT the Earth's field at the site; null keeps the magnetometer's own scale */
  constructor(sensors: readonly SensorPlace[], models: readonly SensorModel[], fieldUT: number | null) {
    this.#models = models;
    this.#fieldUT = fieldUT;
    this.#readings = new Float64Array(sensors.length * MOST_READINGS * 3);
    this.#count = new Uint32Array(sensors.length);
  }

  observe({ raw, present, sensorCount }: Sweep): void {
    for (let i = 0; i < sensorCount; i++) {
      const count = this.#count[i]!;
      if ((present[i]! & HAS_MAG) === 0 || count === MOST_READINGS) continue;
      const from = i * CHANNELS + MAG;
      const to = (i * MOST_READINGS + count) * 3;
      const apart = count === 0 ? APART_UT : this.#apart(raw, from, to - 3);
      if (apart < APART_UT) continue;
      for (let k = 0; k < 3; k++) this.#readings[to + k] = raw[from + k]!;
      this.#count[i]!++;
    }
  }

  #apart(raw: Float64Array, from: number, last: number): number {
    let square = 0;
    for (let k = 0; k < 3; k++) square += (raw[from + k]! - this.#readings[last + k]!) ** 2;
    return Math.sqrt(square);
  }

  progress(): Progress {
    const seen = this.#models.map((_, i) => cellsSeen(this.#of(i), midrange(this.#of(i))));
    const shares = seen.map((cells) => shareSeen(cells));
    // Sensors that are not being turned are not waited for.
    const best = shares.reduce((a, b) => Math.max(a, b), 0);
    const worst = shares.filter((share) => share > 0.2).reduce((a, b) => Math.min(a, b), best);
    if (worst >= ENOUGH_COVERAGE) return { share: 1, text: "Done." };
    const missing = describeMissing(seen[shares.indexOf(worst)]!);
    const text = `Turn it slowly through all directions${missing === "" ? "" : `; still missing: ${missing}`}.`;
    return { share: worst / ENOUGH_COVERAGE, text };
  }

  result(): readonly Outcome<TurnThroughNumbers>[] {
    return this.#models.map((model, i) => this.#outcome(model, this.#of(i)));
  }

  #of(i: number): Float64Array {
    const at = i * MOST_READINGS * 3;
    return this.#readings.subarray(at, at + this.#count[i]! * 3);
  }

  #outcome(model: SensorModel, readings: Float64Array): Outcome<TurnThroughNumbers> {
    if (model.mag === undefined) return refused("this sensor has no magnetometer");
    const before = cellsSeen(readings, midrange(readings));
    const tooFew = `${percent(shareSeen(before))} of the directions seen, ${percent(LEAST_COVERAGE)} are needed`;
    if (readings.length < 3 * CELLS) return refused(`${tooFew}; missing: ${describeMissing(before)}`);
    const fit = fitEllipsoid(readings, this.#fieldUT);
    if (fit === null)
      return refused(`the readings lie on no ellipsoid: ${tooFew}; missing: ${describeMissing(before)}`);
    const seen = cellsSeen(readings, (reading) => calibrated(fit, reading));
    const coverage = shareSeen(seen);
    const missing = describeMissing(seen);
    if (coverage < LEAST_COVERAGE) {
      return refused(
        `${percent(coverage)} of the directions seen, ${percent(LEAST_COVERAGE)} are needed; missing: ${missing}`,
      );
    }
    if (fit.residual > LARGEST_RESIDUAL_NOISES * model.mag.noiseUT) {
      return refused(
        `the field changed while it was turned: lengths differ by ${fit.residual.toFixed(1)} µT; keep away from steel and motors`,
      );
    }
    const element = Math.max(...fit.matrix.map(Math.abs));
    if (fit.sigmaCentre > LARGEST_SIGMA_UT || fit.sigmaMatrix > LARGEST_SIGMA_SHARE * element) {
      return refused(`these directions do not tell its iron well enough; missing: ${missing}`);
    }
    return {
      ok: true,
      numbers: numbersOf(fit, coverage),
      warnings: missing === "" ? [] : [`not seen: ${missing}`],
    };
  }
}

function numbersOf({ centre, matrix, residual, sigmaCentre, sigmaMatrix }: EllipsoidFit, coverage: number) {
  const row = (r: number): Triple => [matrix[3 * r]!, matrix[3 * r + 1]!, matrix[3 * r + 2]!];
  return {
    magHardIronUT: [centre[0]!, centre[1]!, centre[2]!] as const,
    magSoftIron: [row(0), row(1), row(2)] as const,
    sigmaHardIronUT: sigmaCentre,
    sigmaSoftIron: sigmaMatrix,
    residualUT: residual,
    coverage,
  };
}

/** Which cells hold a reading; `centred` turns a reading into a direction. */
function cellsSeen(readings: Float64Array, centred: (reading: Float64Array) => ArrayLike<number>): boolean[] {
  const seen = new Array<boolean>(CELLS).fill(false);
  for (let at = 0; at < readings.length; at += 3) {
    seen[cellOf(centred(readings.subarray(at, at + 3)))] = true;
  }
  return seen;
}

/** Before there is a fit: about the middle between the extremes. */
function midrange(readings: Float64Array): (reading: Float64Array) => number[] {
  const low = [Infinity, Infinity, Infinity];
  const high = [-Infinity, -Infinity, -Infinity];
  for (let at = 0; at < readings.length; at++) {
    low[at % 3] = Math.min(low[at % 3]!, readings[at]!);
    high[at % 3] = Math.max(high[at % 3]!, readings[at]!);
  }
  return (reading) => [0, 1, 2].map((k) => reading[k]! - (low[k]! + high[k]!) / 2);
}

function calibrated({ centre, matrix }: EllipsoidFit, reading: Float64Array): number[] {
  return [0, 1, 2].map((r) =>
    [0, 1, 2].reduce((sum, c) => sum + matrix[3 * r + c]! * (reading[c]! - centre[c]!), 0),
  );
}

function percent(share: number): string {
  return `${Math.round(share * 100)} %`;
}
