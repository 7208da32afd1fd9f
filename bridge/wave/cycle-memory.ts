/**
 * The newest sweeps as rows of numbers, kept until the beat they belong to has ended. A ring of flat arrays: nothing is
 * allocated after construction, the oldest row is overwritten.
 */

/** Rows beyond the nominal rate: hub clocks are off by far less, and a crossing is known only some sweeps later. */
const RESERVE = 1.5;

export class CycleMemory {
  readonly columns: number;
  /** Rows it holds. */
  readonly capacity: number;
  /** All rows; where a row begins, `begin` and `rowAt` say. */
  readonly values: Float64Array;
  readonly #timesS: Float64Array;
  readonly #doubts: Uint16Array;
  /** Rows begun since the start; the newest is #count - 1. */
  #count = 0;

  /**
   * @param rateHz sweeps a second, nominal
   * @param spanS the longest span that is asked for
   * @param columns numbers a row
   */
  constructor(rateHz: number, spanS: number, columns: number) {
    this.columns = columns;
    this.capacity = Math.ceil(rateHz * spanS * RESERVE) + 2;
    this.values = new Float64Array(this.capacity * columns);
    this.#timesS = new Float64Array(this.capacity);
    this.#doubts = new Uint16Array(this.capacity);
  }

  /** Begins the row of a sweep. @returns where it begins in `values`: the caller writes `columns` numbers there */
  begin(timeS: number, doubts: number): number {
    const at = this.#count % this.capacity;
    this.#timesS[at] = timeS;
    this.#doubts[at] = doubts;
    this.#count++;
    return at * this.columns;
  }

  /** Number of the first row at or after `timeS`, counted from the start; the count of rows when there is none. */
  firstSince(timeS: number): number {
    let row = this.#count;
    while (row > this.oldest && this.timeOf(row - 1) >= timeS) row--;
    return row;
  }

  /** Number of the oldest row that is still there. */
  get oldest(): number {
    return Math.max(0, this.#count - this.capacity);
  }

  timeOf(row: number): number {
    return this.#timesS[row % this.capacity];
  }

  doubtsOf(row: number): number {
    return this.#doubts[row % this.capacity];
  }

  rowAt(row: number): number {
    return (row % this.capacity) * this.columns;
  }
}
