/**
 * In which order a travelling wave reaches the sensors, from any motion that waves: over a window, each pair's products of
 * signal with signal and with derivative give the lag of one behind the other, at whatever frequency the window has. Two
 * sensors that were exchanged show as a wave that runs backwards between them.
 *
 * A standing wave (a body bent to and fro as a whole) has no order, and none is told.
 */

/** Share of two signals' power that must wave alike. */
const COHERENT = 0.8;
/** A wave whose lags add up to less than this from nose to tail stands, rad: 60°. */
const LEAST_WHOLE_LAG = 1;
/** Neighbours that lag by more may as well lead, rad: a third of a wave. */
const MOST_LAG = 2.1;
/** Sensors that an order can be told from. */
const LEAST_SENSORS = 4;
/** Waves a body length that arrangements are compared by. */
const MOST_WAVES = 3;
const WAVE_STEPS = 60;
/** An exchange must be this much more even than an order that runs one way already. */
const DECISIVE = 0.1;

export type Order =
  | { readonly kind: "unclear" }
  | { readonly kind: "in order" }
  /** Exchanging these two, front-most first, puts the wave in order. */
  | { readonly kind: "swapped"; readonly first: number; readonly second: number };

const UNCLEAR: Order = { kind: "unclear" };

export class PhaseOrder {
  readonly #stations: readonly number[];
  readonly #n: number;
  /** Signals of the last two calls. */
  readonly #before: Float64Array;
  readonly #last: Float64Array;
  #beforeS = Number.NaN;
  #lastS = Number.NaN;
  /** n x n: signal times signal, and signal times the other's derivative. */
  readonly #both: Float64Array;
  readonly #slope: Float64Array;
  readonly #slopes: Float64Array;
  #count = 0;

  /** @param stations 0 nose to 1 tail tip, increasing */
  constructor(stations: readonly number[]) {
    this.#stations = stations;
    this.#n = stations.length;
    this.#before = new Float64Array(this.#n);
    this.#last = new Float64Array(this.#n);
    this.#both = new Float64Array(this.#n * this.#n);
    this.#slope = new Float64Array(this.#n * this.#n);
    this.#slopes = new Float64Array(this.#n);
  }

  /** One signal a sensor, of zero mean; NaN begins anew. Allocates nothing. */
  add(timeS: number, signals: Float64Array): void {
    const n = this.#n;
    const spanS = timeS - this.#beforeS;
    if (spanS > 0) {
      for (let j = 0; j < n; j++) {
        const slope = (signals[j]! - this.#before[j]!) / spanS;
        if (Number.isNaN(slope + this.#last[j]!)) continue;
        this.#slopes[j]! += slope * slope;
        for (let i = 0; i < n; i++) {
          const value = this.#last[i]!;
          if (Number.isNaN(value)) continue;
          this.#both[i * n + j]! += value * this.#last[j]!;
          this.#slope[i * n + j]! += value * slope;
        }
      }
      this.#count++;
    }
    this.#before.set(this.#last);
    this.#last.set(signals);
    this.#beforeS = this.#lastS;
    this.#lastS = timeS;
  }

  reset(): void {
    this.#both.fill(0);
    this.#slope.fill(0);
    this.#slopes.fill(0);
    this.#count = 0;
    this.#beforeS = Number.NaN;
    this.#lastS = Number.NaN;
  }

  /**
   * What the window shows.
   * @param leastRms signals below this do not wave
   * @param reversed a wave runs backwards between two neighbours from this lag on, rad
   */
  judge(leastRms: number, reversed: number): Order {
    const n = this.#n;
    if (this.#count === 0) return UNCLEAR;
    const chain = this.#stations
      .map((_, i) => i)
      .filter((i) => this.#both[i * n + i]! > leastRms * leastRms * this.#count);
    if (chain.length < LEAST_SENSORS) return UNCLEAR;
    if (!chain.every((i, k) => k === 0 || this.#coherence(chain[k - 1]!, i) > COHERENT)) return UNCLEAR;
    const forward = this.#lags(chain);
    const backward = forward.map((lag) => -lag);
    const own = [forward, backward].find((lags) => lags.every((lag) => lag > -reversed) && isWave(lags));
    // A far exchange can make all lags wrap round to one side; then it is the evenness that gives it away.
    const better = own === undefined ? 0 : this.#evenness(chain, own) + DECISIVE;
    const exchange = this.#bestExchange(chain, better);
    return exchange.kind === "unclear" && own !== undefined ? { kind: "in order" } : exchange;
  }

  /** The exchange that makes the wave run from nose to tail, and most evenly, but more evenly than `better`. */
  #bestExchange(chain: readonly number[], better: number): Order {
    let best: Order = UNCLEAR;
    let bestScore = better;
    for (let a = 0; a < chain.length; a++) {
      for (let b = a + 1; b < chain.length; b++) {
        const tried = [...chain];
        [tried[a], tried[b]] = [chain[b]!, chain[a]!];
        const lags = this.#lags(tried);
        if (lags.some((lag) => lag <= 0) || !isWave(lags)) continue;
        const score = this.#evenness(chain, lags);
        if (score <= bestScore) continue;
        best = { kind: "swapped", first: chain[a]!, second: chain[b]! };
        bestScore = score;
      }
    }
    return best;
  }

  /** How well one wavelength explains the lags, at its best: their mean cosine off it. */
  #evenness(chain: readonly number[], lags: readonly number[]): number {
    let best = Number.NEGATIVE_INFINITY;
    for (let step = 1; step <= WAVE_STEPS; step++) {
      const perLength = (2 * Math.PI * MOST_WAVES * step) / WAVE_STEPS;
      const sum = lags.reduce((total, lag, k) => {
        const piece = this.#stations[chain[k + 1]!]! - this.#stations[chain[k]!]!;
        return total + Math.cos(lag - perLength * piece);
      }, 0);
      best = Math.max(best, sum / lags.length);
    }
    return best;
  }

  /** Lag of each behind the one before it, rad, -pi .. pi. */
  #lags(chain: readonly number[]): number[] {
    const omega = this.#omega();
    return chain.slice(1).map((j, k) => {
      const i = chain[k]!;
      return Math.atan2(this.#quadrature(i, j) / omega, this.#both[i * this.#n + j]!);
    });
  }

  #coherence(i: number, j: number): number {
    const n = this.#n;
    const power = Math.sqrt(this.#both[i * n + i]! * this.#both[j * n + j]!);
    return Math.hypot(this.#both[i * n + j]!, this.#quadrature(i, j) / this.#omega()) / power;
  }

  #quadrature(i: number, j: number): number {
    return (this.#slope[i * this.#n + j]! - this.#slope[j * this.#n + i]!) / 2;
  }

  /** The window's angular frequency, rad/s. */
  #omega(): number {
    let squares = 0;
    let slopes = 0;
    for (let i = 0; i < this.#n; i++) {
      squares += this.#both[i * this.#n + i]!;
      slopes += this.#slopes[i]!;
    }
    return Math.sqrt(slopes / squares);
  }
}

/** Lags, all to one side, that a wave along the body makes. */
function isWave(lags: readonly number[]): boolean {
  const whole = lags.reduce((sum, lag) => sum + lag, 0);
  return whole > LEAST_WHOLE_LAG && lags.every((lag) => lag < MOST_LAG);
}
