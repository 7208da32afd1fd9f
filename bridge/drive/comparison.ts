/**
 * Signals compared with references on one clock, over and over while a trial runs: gain, lag, RMSE and r2 of the newest
 * window and of the whole trial.
 *
 * Twice a second the newest window is looked at. While the leading reference repeats itself it holds whole cycles, two to
 * four, and gain and lag come from the Fourier coefficients at the fundamental (fundamental.ts); otherwise the last five
 * seconds, and gain and lag are those of least squares (lag-search.ts). RMSE and r2 are taken from the samples of the same
 * window. A signal with a sample missing in the window has no figures in it.
 */
import { MOST_CYCLES, SLOWEST_CYCLE_S, WholeCycles } from "./cycles.ts";
import { createFigures, type Figures, Residuals, TrialFigures } from "./figures.ts";
import { Fundamental } from "./fundamental.ts";
import { LagSearch, MOST_LAG_S } from "./lag-search.ts";
import { SampleRing } from "./sample-ring.ts";

/** Samples kept a second: forty a cycle at 5 Hz. */
const MOST_RATE_HZ = 200;
/** Two samples closer than this, as a share of the kept interval, are one too many. */
const LEAST_STEP_SHARE = 0.8;
const EVALUATE_S = 0.5;
/** Window where nothing repeats, s. */
const WINDOW_S = 5;
/** The cycles compared, the one under way, and as much again as a lag may reach. */
const RING_S = (MOST_CYCLES + 2) * SLOWEST_CYCLE_S;
/** Fewer samples say nothing. */
const LEAST_SAMPLES = 20;
/** A signal smaller than this share of its reference has no phase to speak of. */
const LEAST_GAIN = 0.02;

/** Signals in order along the body, whose lags lie within half a cycle of their neighbours'. */
export interface Chain {
  readonly first: number;
  readonly count: number;
  /** The one next to the drive: its lag is within half a cycle of zero. */
  readonly nearest: number;
}

export interface ComparisonOptions {
  readonly rateHz: number;
  /** What moves least still counts as moving: half the range of each reference, in its own unit. */
  readonly leastMotion: readonly number[];
  /** Reference of each signal. */
  readonly against: readonly number[];
  readonly chains: readonly Chain[];
  /** false takes each window's mean and straight drift off before RMSE: for references with a zero of their own. */
  readonly keepOffsets: boolean;
}

export type Method = "whole cycles" | "least squares";

export class Comparison {
  /** Of the newest window. Borrowed: rewritten by each evaluation. */
  readonly figures: Figures;
  method: Method | null = null;
  /** The newest window, s. */
  startS = Number.NaN;
  endS = Number.NaN;
  /** Windows that went into the trial's figures. */
  windows = 0;
  readonly cycles = new WholeCycles();
  readonly ring: SampleRing;
  readonly trial: TrialFigures;

  readonly #options: ComparisonOptions;
  readonly #referenceCount: number;
  readonly #leastStepS: number;
  readonly #fundamental: Fundamental;
  readonly #search: LagSearch;
  /** Columns compared with each reference. */
  readonly #measured: readonly (readonly number[])[];
  readonly #gridLagS: Float64Array;
  readonly #lagged: Float64Array;
  readonly #sums = new Residuals();
  /** Mean and straight drift of each column in the window; 0 where offsets are kept. */
  readonly #offsets: Float64Array;
  /** Cosine and sine of each reference; NaN where it does not move. */
  readonly #phasors: Float64Array;
  #range = { middle: 0, half: 0 };
  #evaluateAtS = Number.NEGATIVE_INFINITY;
  #newestS = Number.NEGATIVE_INFINITY;

  constructor(options: ComparisonOptions) {
    const { rateHz, against, leastMotion } = options;
    this.#options = options;
    this.#referenceCount = leastMotion.length;
    const keptHz = Math.min(rateHz, MOST_RATE_HZ);
    this.#leastStepS = LEAST_STEP_SHARE / keptHz;
    // Jitter may bring a quarter more samples than the rate says.
    this.ring = new SampleRing(this.#referenceCount + against.length, Math.ceil(1.25 * keptHz * RING_S));
    this.figures = createFigures(against.length);
    this.trial = new TrialFigures(against.length);
    this.#fundamental = new Fundamental(this.ring.capacity);
    this.#search = new LagSearch(this.ring);
    this.#measured = leastMotion.map((_, r) =>
      against.flatMap((of, i) => (of === r ? [this.#referenceCount + i] : [])),
    );
    this.#gridLagS = new Float64Array(this.#referenceCount + against.length);
    this.#lagged = new Float64Array(this.ring.capacity);
    this.#offsets = new Float64Array(2 * this.ring.columns.length);
    this.#phasors = new Float64Array(2 * this.#referenceCount);
  }

  /**
   * Takes one moment's references and signals.
   * @param timeS increasing
   * @returns true when `figures` are new
   */
  push(timeS: number, references: Float64Array, measured: Float64Array): boolean {
    if (timeS - this.#newestS < this.#leastStepS) return false;
    this.#newestS = timeS;
    this.ring.push(timeS, references, measured);
    if (timeS < this.#evaluateAtS) return false;
    this.#evaluateAtS = timeS + EVALUATE_S;
    return this.#evaluate();
  }

  #evaluate(): boolean {
    const { ring, cycles } = this;
    const from = ring.indexAt(this.#newestS - WINDOW_S);
    const leading = this.#leadingReference(from);
    if (ring.end - from < LEAST_SAMPLES || leading < 0) {
      this.#forget();
      return false;
    }
    cycles.find(ring, leading, this.#range.middle, this.#range.half);
    if (cycles.count > 0) return this.#compareCycles();
    // The lags looked for need half a second of reference before the window.
    const before = ring.indexAt(this.#newestS - WINDOW_S - MOST_LAG_S);
    if (before === ring.end - ring.count || ring.hasHole(before)) return false;
    return this.#compareWindow(from);
  }

  /** The reference that moves most beyond what counts as moving, its range left in #range; -1 when none moves. */
  #leadingReference(from: number): number {
    let leading = -1;
    let most = 1;
    this.#options.leastMotion.forEach((least, r) => {
      const { middle, half } = rangeOf(this.ring.columns[r], from, this.ring.end);
      if (!(half / least >= most)) return;
      leading = r;
      most = half / least;
      this.#range = { middle, half };
    });
    return leading;
  }

  /** Nothing moves: the figures of an old window are not those of now. */
  #forget(): void {
    this.method = null;
    this.cycles.count = 0;
    for (const values of Object.values(this.figures) as Float64Array[]) values.fill(Number.NaN);
  }

  #compareCycles(): boolean {
    const { ring, cycles, figures } = this;
    if (this.method === "whole cycles" && cycles.endS === this.endS) return false;
    const start = ring.indexAt(cycles.startS);
    const end = ring.indexAt(cycles.endS);
    if (end - start < LEAST_SAMPLES) return false;
    const fundamental = this.#fundamental;
    fundamental.prepare(ring.timeS, start, end, (2 * Math.PI) / cycles.periodS);
    const { terms, omega } = fundamental;
    const phasors = this.#phasors;
    for (let r = 0; r < this.#referenceCount; r++) {
      fundamental.fit(ring.columns[r]);
      this.#keepOffsets(r, terms[0], terms[1]);
      const moves = Math.hypot(terms[2], terms[3]) >= this.#options.leastMotion[r];
      phasors[2 * r] = moves ? terms[2] : Number.NaN;
      phasors[2 * r + 1] = moves ? terms[3] : Number.NaN;
    }
    this.#options.against.forEach((r, i) => {
      fundamental.fit(ring.columns[this.#referenceCount + i]);
      this.#keepOffsets(this.#referenceCount + i, terms[0], terms[1]);
      const along = terms[2] * phasors[2 * r] + terms[3] * phasors[2 * r + 1];
      const behind = terms[3] * phasors[2 * r] - terms[2] * phasors[2 * r + 1];
      const gain = Math.hypot(terms[2], terms[3]) / Math.hypot(phasors[2 * r], phasors[2 * r + 1]);
      figures.gain[i] = gain;
      figures.lagS[i] = gain >= LEAST_GAIN ? Math.atan2(behind, along) / omega : Number.NaN;
    });
    for (const chain of this.#options.chains) joinLags(figures.lagS, chain, cycles.periodS);
    return this.#finish("whole cycles", cycles.startS, cycles.endS, start, end);
  }

  #compareWindow(start: number): boolean {
    const { ring, figures } = this;
    const { end } = ring;
    const search = this.#search;
    ring.columns.forEach((values, column) => {
      const { mean, drift } = lineThrough(ring.timeS, values, start, end);
      this.#keepOffsets(column, mean, drift);
    });
    this.#measured.forEach((columns, r) => {
      search.look(r, columns, start, end, this.#gridLagS);
      for (const column of columns) {
        search.refine(r, column, start, end, this.#gridLagS[column]);
        figures.gain[column - this.#referenceCount] = search.gain;
        figures.lagS[column - this.#referenceCount] = search.lagS;
      }
    });
    return this.#finish("least squares", ring.timeS[start], ring.timeS[end - 1], start, end);
  }

  #keepOffsets(column: number, mean: number, drift: number): void {
    if (this.#options.keepOffsets) return;
    this.#offsets[2 * column] = mean;
    this.#offsets[2 * column + 1] = drift;
  }

  /** RMSE and r2 of the window [start, end), whose gains and lags are known; and the trial's share of it. */
  #finish(method: Method, startS: number, endS: number, start: number, end: number): boolean {
    this.method = method;
    this.startS = startS;
    this.endS = endS;
    this.windows++;
    const { figures } = this;
    const sums = this.#sums;
    this.#options.against.forEach((r, i) => {
      this.#sum(i, r, start, end);
      figures.rmse[i] = Math.sqrt(sums.squares / sums.n);
      figures.rmseLagRemoved[i] = Math.sqrt(sums.squaresLagged / sums.nLagged);
      figures.r2[i] = sums.yr ** 2 / (sums.yy * sums.rr);
      if (!Number.isNaN(figures.lagS[i])) this.trial.add(i, figures.gain[i], figures.lagS[i], sums);
    });
    return true;
  }

  #sum(signal: number, reference: number, start: number, end: number): void {
    const { ring } = this;
    const offsets = this.#offsets;
    const column = this.#referenceCount + signal;
    const lagS = this.figures.lagS[signal];
    const y = ring.columns[column];
    const r = ring.columns[reference];
    const middleS = 0.5 * (ring.timeS[start] + ring.timeS[end - 1]);
    const sums = this.#sums;
    sums.clear();
    ring.laggedInto(this.#lagged, reference, lagS, start, end);
    for (let i = start; i < end; i++) {
      const t = ring.timeS[i] - middleS;
      const lagged =
        this.#lagged[i - start] - offsets[2 * reference] - offsets[2 * reference + 1] * (t - lagS);
      sums.add(
        y[i] - offsets[2 * column] - offsets[2 * column + 1] * t,
        r[i] - offsets[2 * reference] - offsets[2 * reference + 1] * t,
        lagged,
      );
    }
  }
}

/** Middle and half the range of a stretch of samples. */
function rangeOf(
  values: Float64Array,
  start: number,
  end: number,
): { readonly middle: number; readonly half: number } {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = start; i < end; i++) {
    low = Math.min(low, values[i]);
    high = Math.max(high, values[i]);
  }
  return { middle: 0.5 * (low + high), half: 0.5 * (high - low) };
}

/** The straight line through a stretch of samples, by least squares: its value in the middle, and its slope. */
function lineThrough(
  timeS: Float64Array,
  values: Float64Array,
  start: number,
  end: number,
): { readonly mean: number; readonly drift: number } {
  const middleS = 0.5 * (timeS[start] + timeS[end - 1]);
  const n = end - start;
  let [sumT, sumTT, sumY, sumTY] = [0, 0, 0, 0];
  for (let i = start; i < end; i++) {
    const t = timeS[i] - middleS;
    sumT += t;
    sumTT += t * t;
    sumY += values[i];
    sumTY += t * values[i];
  }
  const drift = (sumTY - (sumT * sumY) / n) / (sumTT - sumT ** 2 / n);
  return { mean: (sumY - drift * sumT) / n, drift };
}

/**
 * A phase tells a lag but for whole periods: from the drive outwards, each lag is taken next to that of its neighbour.
 */
function joinLags(lagS: Float64Array, { first, count, nearest }: Chain, periodS: number): void {
  const join = (i: number, neighbourS: number): number => {
    if (Number.isNaN(lagS[i])) return neighbourS;
    lagS[i] += periodS * Math.round((neighbourS - lagS[i]) / periodS);
    return lagS[i];
  };
  const middleS = join(nearest, 0);
  for (let i = nearest + 1, near = middleS; i < first + count; i++) near = join(i, near);
  for (let i = nearest - 1, near = middleS; i >= first; i--) near = join(i, near);
}
