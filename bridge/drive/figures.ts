/** Gain, lag, RMSE and r2 of several signals, each against its reference: those of one window, and those of a whole trial. */

/** One number a signal; NaN where there is none. Lag and RMSE in s and in the signals' own unit. */
export interface Figures {
  /** Amplitude over the reference's. */
  readonly gain: Float64Array;
  /** s, positive when the signal follows the reference. */
  readonly lagS: Float64Array;
  /** Root mean square of signal minus reference. */
  readonly rmse: Float64Array;
  /** The same with the lag taken off; the gain stays. */
  readonly rmseLagRemoved: Float64Array;
  /** Square of the correlation coefficient (Pearson) with the lag taken off. */
  readonly r2: Float64Array;
}

export function createFigures(signalCount: number): Figures {
  const empty = () => new Float64Array(signalCount).fill(Number.NaN);
  return { gain: empty(), lagS: empty(), rmse: empty(), rmseLagRemoved: empty(), r2: empty() };
}

/** Sums over one window of a signal y and its reference r. */
export class Residuals {
  n = 0;
  squares = 0;
  nLagged = 0;
  squaresLagged = 0;
  sumY = 0;
  sumR = 0;
  sumYY = 0;
  sumRR = 0;
  sumYR = 0;

  clear(): void {
    this.n = 0;
    this.squares = 0;
    this.nLagged = 0;
    this.squaresLagged = 0;
    this.sumY = 0;
    this.sumR = 0;
    this.sumYY = 0;
    this.sumRR = 0;
    this.sumYR = 0;
  }

  /** @param rLagged the reference one lag earlier; NaN where it is not known */
  add(y: number, r: number, rLagged: number): void {
    if (Number.isNaN(y + r)) return;
    this.n++;
    this.squares += (y - r) ** 2;
    if (Number.isNaN(rLagged)) return;
    this.nLagged++;
    this.squaresLagged += (y - rLagged) ** 2;
    this.sumY += y;
    this.sumR += rLagged;
    this.sumYY += y * y;
    this.sumRR += rLagged * rLagged;
    this.sumYR += y * rLagged;
  }

  /** Central sums: of y, of r, and of both. */
  get yy(): number {
    return this.sumYY - this.sumY ** 2 / this.nLagged;
  }
  get rr(): number {
    return this.sumRR - this.sumR ** 2 / this.nLagged;
  }
  get yr(): number {
    return this.sumYR - (this.sumY * this.sumR) / this.nLagged;
  }
}

/**
 * A whole trial's figures from those of its windows. Gains and lags are means, each window weighted by its reference's
 * sum of squares; RMSE and r2 are those of all windows' samples together.
 */
export class TrialFigures {
  readonly #signalCount: number;
  readonly #weight: Float64Array;
  readonly #gain: Float64Array;
  readonly #lag: Float64Array;
  readonly #n: Float64Array;
  readonly #squares: Float64Array;
  readonly #nLagged: Float64Array;
  readonly #squaresLagged: Float64Array;
  readonly #yy: Float64Array;
  readonly #rr: Float64Array;
  readonly #yr: Float64Array;

  constructor(signalCount: number) {
    const zeros = () => new Float64Array(signalCount);
    this.#signalCount = signalCount;
    this.#weight = zeros();
    this.#gain = zeros();
    this.#lag = zeros();
    this.#n = zeros();
    this.#squares = zeros();
    this.#nLagged = zeros();
    this.#squaresLagged = zeros();
    this.#yy = zeros();
    this.#rr = zeros();
    this.#yr = zeros();
  }

  add(signal: number, gain: number, lagS: number, sums: Residuals): void {
    const weight = sums.rr;
    if (!(weight > 0)) return;
    this.#weight[signal] += weight;
    this.#gain[signal] += weight * gain;
    this.#lag[signal] += weight * lagS;
    this.#n[signal] += sums.n;
    this.#squares[signal] += sums.squares;
    this.#nLagged[signal] += sums.nLagged;
    this.#squaresLagged[signal] += sums.squaresLagged;
    this.#yy[signal] += sums.yy;
    this.#rr[signal] += sums.rr;
    this.#yr[signal] += sums.yr;
  }

  /** The figures so far; NaN for a signal that was never compared. */
  figures(): Figures {
    const figures = createFigures(this.#signalCount);
    for (let i = 0; i < this.#signalCount; i++) {
      figures.gain[i] = this.#gain[i] / this.#weight[i];
      figures.lagS[i] = this.#lag[i] / this.#weight[i];
      figures.rmse[i] = Math.sqrt(this.#squares[i] / this.#n[i]);
      figures.rmseLagRemoved[i] = Math.sqrt(this.#squaresLagged[i] / this.#nLagged[i]);
      figures.r2[i] = this.#yr[i] ** 2 / (this.#yy[i] * this.#rr[i]);
    }
    return figures;
  }

  /** All signals together, as if they were one. */
  overall(): { gain: number; lagS: number; rmse: number; r2: number } {
    const weight = sum(this.#weight);
    return {
      gain: sum(this.#gain) / weight,
      lagS: sum(this.#lag) / weight,
      rmse: Math.sqrt(sum(this.#squares) / sum(this.#n)),
      r2: sum(this.#yr) ** 2 / (sum(this.#yy) * sum(this.#rr)),
    };
  }
}

function sum(values: Float64Array): number {
  let total = 0;
  for (const value of values) total += value;
  return total;
}
