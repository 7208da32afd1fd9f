/**
 * The last sweeps of a run, all of them: what looking back and the strip read from. Fixed memory, oldest overwritten,
 * nothing allocated after construction. One row a sweep; S sensors, P midline points:
 *
 *     timeS         f64          hub time, s, strictly increasing
 *     raw           f32 x 9S     rad/s, m/s², µT in sensor axes, as in sweep.ts
 *     orientations  f32 x 4S     scalar first, body axes to earth
 *     midline       f32 x 3P     m, earth axes
 *     present       u8 x S       presence bits
 *     conditions    u8 x S       condition bits
 *     trust         u8 x S
 *
 * Rows are numbered from the start of the run. A reader that asks for a row older than `oldest` was lapped.
 */
import { BendwatchError } from "../errors.ts";
import { CHANNELS, type Sweep } from "../sweep.ts";

const DEFAULT_BUDGET_BYTES = 512 * 2 ** 20;

export interface RingOptions {
  readonly sensorCount: number;
  readonly pointCount: number;
  readonly rateHz: number;
  /** Span asked for, s. */
  readonly seconds: number;
  /** Memory the ring may take; a longer span is cut to it. */
  readonly budgetBytes?: number;
}

/** Rows of a ring, oldest first, as laid out above. */
export interface RingRows {
  readonly timeS: Float64Array;
  readonly raw: Float32Array;
  readonly orientations: Float32Array;
  readonly midline: Float32Array;
  readonly present: Uint8Array;
  readonly conditions: Uint8Array;
  readonly trust: Uint8Array;
}

export class TrialRing {
  /** Rows held when full. */
  readonly capacity: number;
  /** What the capacity means at the nominal rate, s; less than asked for when the budget cut it. */
  readonly secondsHeld: number;
  /** Memory taken. */
  readonly byteLength: number;
  /** Rows pushed since the start; the newest row is number total - 1. */
  total = 0;
  readonly #sensorCount: number;
  readonly #pointCount: number;
  readonly #rows: RingRows;

  /** @throws BendwatchError MISUSE when a count, rate or span is not positive or one row exceeds the budget */
  constructor(options: RingOptions) {
    const { sensorCount, pointCount, rateHz, seconds, budgetBytes = DEFAULT_BUDGET_BYTES } = options;
    const rowBytes = 8 + 4 * (sensorCount * (CHANNELS + 4) + pointCount * 3) + 3 * sensorCount;
    this.capacity = Math.min(Math.ceil(seconds * rateHz), Math.floor(budgetBytes / rowBytes));
    if (!(sensorCount > 0 && pointCount > 0 && rateHz > 0 && this.capacity >= 1)) {
      throw new BendwatchError("MISUSE", {
        where: "ring buffer",
        found: JSON.stringify(options),
        expected: `positive counts, rate and span, and a budget of at least one row (${rowBytes} bytes)`,
      });
    }
    this.#sensorCount = sensorCount;
    this.#pointCount = pointCount;
    this.secondsHeld = this.capacity / rateHz;
    this.byteLength = this.capacity * rowBytes;
    this.#rows = this.createRows(this.capacity);
  }

  /** Number of the oldest row still held; equal to `total` while empty. */
  get oldest(): number {
    return Math.max(0, this.total - this.capacity);
  }

  /** Arrays for `count` rows, for `read` to fill. */
  createRows(count: number): RingRows {
    const sensors = this.#sensorCount * count;
    return {
      timeS: new Float64Array(count),
      raw: new Float32Array(sensors * CHANNELS),
      orientations: new Float32Array(sensors * 4),
      midline: new Float32Array(this.#pointCount * 3 * count),
      present: new Uint8Array(sensors),
      conditions: new Uint8Array(sensors),
      trust: new Uint8Array(sensors),
    };
  }

  /** Keeps a copy of a sweep and what was computed from it, over the oldest row when full. */
  push(sweep: Sweep, orientations: Float64Array, trust: Uint8Array, midline: Float64Array): void {
    const rows = this.#rows;
    const row = this.total % this.capacity;
    const sensor = row * this.#sensorCount;
    rows.timeS[row] = sweep.timeS;
    rows.raw.set(sweep.raw, sensor * CHANNELS);
    rows.orientations.set(orientations, sensor * 4);
    rows.midline.set(midline, row * this.#pointCount * 3);
    rows.present.set(sweep.present, sensor);
    rows.conditions.set(sweep.conditions, sensor);
    rows.trust.set(trust, sensor);
    this.total++;
  }

  /**
   * Copies rows `from`, `from + 1` ... into the caller's arrays, as many as there are, fit and were asked for.
   * @returns the number of rows copied; 0 when `from` is not held (with from < oldest the reader was lapped)
   */
  read(from: number, count: number, into: RingRows): number {
    if (from < this.oldest || from >= this.total) return 0;
    const copied = Math.min(count, this.total - from, into.timeS.length);
    for (let i = 0; i < copied; i++) this.#copyRow((from + i) % this.capacity, i, into);
    return copied;
  }

  /** Number of the newest row whose time is at or before `timeS`; -1 when none is held. */
  indexAtOrBefore(timeS: number): number {
    let low = this.oldest;
    let high = this.total;
    while (low < high) {
      const middle = low + Math.floor((high - low) / 2);
      if (this.#rows.timeS[middle % this.capacity]! <= timeS) low = middle + 1;
      else high = middle;
    }
    return low > this.oldest ? low - 1 : -1;
  }

  #copyRow(row: number, at: number, into: RingRows): void {
    const rows = this.#rows;
    const sensors = this.#sensorCount;
    const points = this.#pointCount;
    into.timeS[at] = rows.timeS[row]!;
    copy(rows.raw, row, into.raw, at, sensors * CHANNELS);
    copy(rows.orientations, row, into.orientations, at, sensors * 4);
    copy(rows.midline, row, into.midline, at, points * 3);
    copy(rows.present, row, into.present, at, sensors);
    copy(rows.conditions, row, into.conditions, at, sensors);
    copy(rows.trust, row, into.trust, at, sensors);
  }
}

/** Copies row `row` of `from` to row `at` of `into`, `width` numbers a row. */
function copy<T extends Float32Array | Uint8Array>(
  from: T,
  row: number,
  into: T,
  at: number,
  width: number,
): void {
  for (let i = 0; i < width; i++) into[at * width + i] = from[row * width + i]!;
}
