/**
 * Finds axes that are cut off at a level below full scale: the value stays within one count for several readings at the
 * crest of a large, moving signal, entered and left at a slant. What tells a cut from a natural crest:
 *
 * A smooth crest of curvature c per reading² that stays within one count q over n = 4 readings has c (1.5)² / 2 <= q, so
 * two readings before them it lay at most 4 c / 2 x 4 = 5.4 q lower. A cut signal was SHARP_COUNTS = 16 q lower or more.
 * With noise s a crest that was 40 s lower two readings before (curvature above 6 s) would need its outer readings
 * displaced by 6 s each to look level: less than 1e-15 a crest. So noise makes no flat top, rest and slow motion have no
 * slant, and small quantised signals are below the least size.
 *
 * What tells a cut from a stuck axis: the signal comes down from the level about as steeply as it went up to it, not with
 * a jump. A long plateau is not waited out: it is a cut when it is the highest level of the last seconds, as a stuck
 * value is only by chance. A drive that turns at a constant rate for a few readings, with no noise, would look the same.
 */
import { CHANNELS } from "../sweep.ts";
import { limitsOf, PARTS } from "./limits.ts";
import type { HealthSetup } from "./setup.ts";
import { RollingMax } from "./windows.ts";

/** Readings on one level that make a plateau. */
const PLATEAU = 4;
/** So many that repeat the highest value exactly count before the signal has left it. */
const LONG_PLATEAU = 12;
/** The first step down from a level, at most, against the rise over the two readings before it. */
const STEEPEST_EXIT = 2;
const SHARP_COUNTS = 16;
const SHARP_NOISE = 40;
/** ... and this share of the level: a slant one can see. */
const SHARP_SHARE = 0.02;
/** Least level, as a share of the range: ranges are set in steps of two, five of them. */
const LEAST_SHARE = 0.04;
/** Least peak to peak against the level: a constant (gravity) with a ripple is no large signal. */
const LEAST_SWING = 0.5;
/** The extreme is that of the last seconds: a whole beat down to 0.25 Hz. */
const EXTREME_S = 4;

export class FlatTops {
  /** Rows are sensors x CHANNELS. */
  readonly #count: Float64Array;
  readonly #sharp: Float64Array;
  /** Levels below the first are no large signal, from the second on they are full scale. */
  readonly #least: Float64Array;
  readonly #fullScale: Float64Array;
  readonly #last: Float64Array;
  readonly #last2: Float64Array;
  readonly #level: Float64Array;
  readonly #run: Uint32Array;
  /** All readings of the run are equal. */
  readonly #exact: Uint8Array;
  /** 1 or -1 when the run was entered at a slant rising or falling, else 0. */
  readonly #entry: Int8Array;
  /** How far below its level the signal was two readings before the run. */
  readonly #rise: Float64Array;
  /** Readings beyond which a plateau that was left counts no more: then it was a stuck axis. */
  readonly #longest: number;
  /** A plateau just left, waiting for the slant behind it: its level, its side, readings since. */
  readonly #leftLevel: Float64Array;
  readonly #leftSide: Int8Array;
  readonly #leftAge: Uint8Array;
  readonly #leftRun: Uint32Array;
  /** Readings before this one that were on a level found with this one; 0 when none was found. */
  readonly foundBehind: Uint32Array;
  /** Levels found: readings there are clipped. */
  readonly #ceiling: Float64Array;
  readonly #floor: Float64Array;
  /** A level was found on some axis in this run. */
  #anyFound = false;
  readonly #high: RollingMax;
  readonly #negatedLow: RollingMax;

  constructor(setup: HealthSetup) {
    const rows = setup.sensors.length * CHANNELS;
    const array = (value = 0) => new Float64Array(rows).fill(value);
    this.#count = array();
    this.#sharp = array();
    this.#least = array();
    this.#fullScale = array();
    setup.sensors.forEach((sensor, i) => {
      limitsOf(sensor, setup.rateHz).forEach((limits, p) => {
        if (limits === null) return;
        const start = i * CHANNELS + PARTS[p]!.at;
        this.#count.fill(limits.count * 1.01, start, start + 3);
        const sharp = Math.max(SHARP_COUNTS * limits.count, SHARP_NOISE * limits.noise);
        this.#sharp.fill(sharp, start, start + 3);
        this.#least.fill(LEAST_SHARE * limits.range, start, start + 3);
        this.#fullScale.fill(setup.thresholds.fullScaleShare * limits.range, start, start + 3);
      });
    });
    this.#last = array();
    this.#last2 = array();
    this.#level = array();
    this.#run = new Uint32Array(rows);
    this.#exact = new Uint8Array(rows);
    this.#entry = new Int8Array(rows);
    this.#rise = array();
    this.#longest = setup.thresholds.stuckAxisS * setup.rateHz;
    this.#leftLevel = array();
    this.#leftSide = new Int8Array(rows);
    this.#leftAge = new Uint8Array(rows);
    this.#leftRun = new Uint32Array(rows);
    this.foundBehind = new Uint32Array(rows);
    this.#ceiling = array(Number.POSITIVE_INFINITY);
    this.#floor = array(Number.NEGATIVE_INFINITY);
    this.#high = new RollingMax(rows, EXTREME_S, 8);
    this.#negatedLow = new RollingMax(rows, EXTREME_S, 8);
  }

  advance(timeS: number): void {
    this.#high.advance(timeS);
    this.#negatedLow.advance(timeS);
  }

  /**
   * Takes one reading of a part.
   * @param afterGap readings before it are missing: no slope can be told across them
   * @returns bits of the axes that are on a level found to be a cut; `foundBehind` tells of those just found
   */
  reading(raw: Float64Array, sensor: number, part: number, afterGap: boolean): number {
    const start = sensor * CHANNELS + PARTS[part]!.at;
    // A row that repeats as a whole is held, not read: it says nothing about levels.
    const held =
      raw[start] === this.#last[start] &&
      raw[start + 1] === this.#last[start + 1] &&
      raw[start + 2] === this.#last[start + 2];
    let axes = 0;
    for (let k = 0; k < 3; k++) {
      const row = start + k;
      this.foundBehind[row] = 0;
      if (!held) this.#follow(row, raw[row]!, afterGap);
      if (!this.#anyFound) continue;
      const atLevel =
        raw[row]! >= this.#ceiling[row]! - this.#count[row]! ||
        raw[row]! <= this.#floor[row]! + this.#count[row]!;
      if (atLevel) axes |= 1 << k;
    }
    return axes;
  }

  #follow(row: number, value: number, afterGap: boolean): void {
    this.#high.put(row, value);
    this.#negatedLow.put(row, -value);
    // Too small for a cut, and nothing under way that it could end: most readings go this way.
    if (Math.abs(value) < this.#least[row]! && this.#run[row]! < PLATEAU && this.#leftSide[row] === 0) {
      this.#run[row] = 0;
      this.#last2[row] = afterGap ? value : this.#last[row]!;
      this.#last[row] = value;
      return;
    }
    const count = this.#count[row]!;
    // Beyond a level that was found: it was none, or the range was changed.
    if (value > this.#ceiling[row]! + count) this.#ceiling[row] = Number.POSITIVE_INFINITY;
    if (value < this.#floor[row]! - count) this.#floor[row] = Number.NEGATIVE_INFINITY;

    if (afterGap) {
      this.#last2[row] = this.#last[row] = value;
      this.#run[row] = 0;
      this.#leftSide[row] = 0;
    }
    this.#checkExit(row, value);
    if (this.#run[row]! > 0 && Math.abs(value - this.#level[row]!) <= count) {
      this.#run[row]!++;
      if (value !== this.#level[row]) this.#exact[row] = 0;
      if (this.#run[row] === LONG_PLATEAU && this.#exact[row] === 1 && this.#isExtreme(row)) {
        this.#found(row, this.#entry[row]!, this.#level[row]!, LONG_PLATEAU - 1);
      }
    } else {
      this.#begin(row, value);
    }
    this.#last2[row] = this.#last[row]!;
    this.#last[row] = value;
  }

  /** A run ends and the next begins with `value`. */
  #begin(row: number, value: number): void {
    const drop = (this.#level[row]! - value) * this.#entry[row]!;
    const run = this.#run[row]!;
    if (
      run >= PLATEAU &&
      run <= this.#longest &&
      drop <= STEEPEST_EXIT * this.#rise[row]! &&
      this.#isLarge(row)
    ) {
      this.#leftLevel[row] = this.#level[row]!;
      this.#leftSide[row] = this.#entry[row]!;
      this.#leftAge[row] = 0;
      this.#leftRun[row] = run;
      this.#checkExit(row, value);
    }
    const side = Math.sign(value - this.#last[row]!);
    this.#rise[row] = (value - this.#last2[row]!) * side;
    this.#entry[row] = this.#rise[row]! >= this.#sharpness(row, value) ? side : 0;
    this.#level[row] = value;
    this.#run[row] = 1;
    this.#exact[row] = 1;
  }

  /** The slant behind a plateau, within two readings of leaving it. */
  #checkExit(row: number, value: number): void {
    const side = this.#leftSide[row]!;
    if (side === 0) return;
    const level = this.#leftLevel[row]!;
    if ((level - value) * side >= this.#sharpness(row, level)) {
      this.#found(row, side, level, this.#leftRun[row]!);
      this.#leftSide[row] = 0;
    } else if (++this.#leftAge[row]! >= 2) {
      this.#leftSide[row] = 0;
    }
  }

  /** The current run was entered at a slant and belongs to a large, moving signal. */
  #isLarge(row: number): boolean {
    const size = Math.abs(this.#level[row]!);
    const swing = this.#high.max(row) + this.#negatedLow.max(row);
    const large = size >= this.#least[row]! && size < this.#fullScale[row]!;
    return this.#entry[row] !== 0 && large && swing >= LEAST_SWING * size;
  }

  /** It is also at the extreme of the last seconds. */
  #isExtreme(row: number): boolean {
    const beyond =
      this.#entry[row]! > 0
        ? this.#high.max(row) - this.#level[row]!
        : this.#negatedLow.max(row) + this.#level[row]!;
    return this.#isLarge(row) && beyond <= this.#count[row]!;
  }

  #found(row: number, side: number, level: number, readings: number): void {
    const known = side > 0 ? this.#ceiling[row]! : this.#floor[row]!;
    if (Math.abs(level - known) <= this.#count[row]!) return;
    this.foundBehind[row] = readings;
    this.#anyFound = true;
    if (side > 0) this.#ceiling[row] = level;
    else this.#floor[row] = level;
  }

  #sharpness(row: number, level: number): number {
    return Math.max(this.#sharp[row]!, SHARP_SHARE * Math.abs(level));
  }
}
