/**
 * From orientations at the stations to the body's midline.
 *
 * The orientation anywhere along the body is interpolated between the two nearest sensors on the sphere (slerp,
 * Shoemake 1985, SIGGRAPH '85), the shorter way round; before the first and beyond the last sensor it is theirs. The
 * midline is a chain of equal straight segments from the nose, each along the body's x axis as interpolated at the
 * segment's middle: whatever the orientations, its length is the body's. Sensors that are lost drop out and their
 * neighbours carry on.
 */
import { arcBetween, normalise, overSine, rotate, signOfDot, slerpKnown } from "../numeric/quaternion.ts";
import { TRUST } from "../sweep.ts";

export interface MidlineOptions {
  readonly lengthM: number;
  /** Place of each sensor, 0 nose to 1 tail tip, ascending. */
  readonly stations: readonly number[];
  /** Evenly spaced points from nose to tail tip, at least 2. */
  readonly pointCount: number;
}

const NOSEWARD = new Float64Array([1, 0, 0]);

export class Midline {
  /** 3 per point, m, earth axes, nose at the origin. Borrowed: rewritten by each step. A straight body facing east at first. */
  readonly positions: Float64Array;
  readonly #segmentM: number;
  readonly #stations: readonly number[];

  // Where each orientation along the body comes from. Places are points and segment middles in turn, nose to tail:
  // place 2k is point k, place 2k + 1 the middle of the segment behind it.
  readonly #placeCount: number;
  readonly #before: Uint16Array;
  readonly #behind: Uint16Array;
  /** Share of the sensor behind. */
  readonly #share: Float64Array;
  /** Which sensors were lost when that was worked out. */
  readonly #lost: Uint8Array;
  #sensorsLeft: number;

  /** Angle between each sensor and the next one that is left, as of the last step. */
  readonly #arc: Float64Array;
  /** One over its sine, 0 where that is too small; and -1 where the shorter way is by the negative quaternion. */
  readonly #overSine: Float64Array;
  readonly #sign: Float64Array;
  /** As of the last step. Borrowed from fusion, which rewrites it with the next sweep. */
  #orientations: Float64Array = new Float64Array(0);

  readonly #orientation = new Float64Array(4);
  readonly #direction = new Float64Array(3);

  constructor({ lengthM, stations, pointCount }: MidlineOptions) {
    this.positions = new Float64Array(pointCount * 3);
    this.#segmentM = lengthM / (pointCount - 1);
    this.#stations = stations;
    this.#placeCount = 2 * pointCount - 1;
    this.#before = new Uint16Array(this.#placeCount);
    this.#behind = new Uint16Array(this.#placeCount);
    this.#share = new Float64Array(this.#placeCount);
    this.#lost = new Uint8Array(stations.length);
    this.#arc = new Float64Array(stations.length);
    this.#overSine = new Float64Array(stations.length);
    this.#sign = new Float64Array(stations.length);
    this.#sensorsLeft = stations.length;
    this.#placeSensors();
    for (let point = 1; point < pointCount; point++) this.positions[3 * point] = -point * this.#segmentM;
  }

  /**
   * Rebuilds `positions`. With every sensor lost, the last shape stays.
   * @param orientations 4 per sensor, body axes to earth
   * @param trust per sensor, as in sweep.ts
   */
  step(orientations: Float64Array, trust: Uint8Array): void {
    if (this.#lossChanged(trust)) this.#placeSensors();
    if (this.#sensorsLeft === 0) return;
    this.#orientations = orientations;
    const { positions } = this;
    const direction = this.#direction;
    for (let place = 1, at = 0; place < this.#placeCount; place += 2, at += 3) {
      this.#measureArc(place);
      this.#interpolate(place);
      rotate(direction, this.#orientation, NOSEWARD);
      positions[at + 3] = positions[at] - this.#segmentM * direction[0];
      positions[at + 4] = positions[at + 1] - this.#segmentM * direction[1];
      positions[at + 5] = positions[at + 2] - this.#segmentM * direction[2];
    }
  }

  /**
   * The roll along the body as of the last step, for the display: rad per point, right side down positive. All 0 before
   * the first step.
   */
  rollInto(out: Float32Array | Float64Array): void {
    if (this.#orientations.length === 0) return;
    for (let place = 0; place < this.#placeCount; place += 2) {
      this.#measureArc(place);
      this.#interpolate(place);
      out[place >> 1] = rollOf(this.#orientation);
    }
  }

  /** Measures the angle between the sensors before and behind `place`, once for all places between them. */
  #measureArc(place: number): void {
    const q = this.#orientations;
    const before = this.#before[place];
    const behind = this.#behind[place];
    if (place > 1 && before === this.#before[place - 2] && behind === this.#behind[place - 2]) return;
    const arc = arcBetween(q, q, 4 * before, 4 * behind);
    this.#arc[before] = arc;
    this.#overSine[before] = overSine(arc);
    this.#sign[before] = signOfDot(q, q, 4 * before, 4 * behind);
  }

  /** Leaves the orientation at `place` in #orientation: slerp, with what is common to all places of a gap known. */
  #interpolate(place: number): void {
    const q = this.#orientations;
    const before = this.#before[place];
    const behind = this.#behind[place];
    const arc = this.#arc[before];
    const over = this.#overSine[before];
    const sign = this.#sign[before];
    slerpKnown(this.#orientation, q, q, this.#share[place], arc, over, sign, 0, 4 * before, 4 * behind);
    normalise(this.#orientation, this.#orientation);
  }

  #lossChanged(trust: Uint8Array): boolean {
    let changed = false;
    for (let i = 0; i < this.#lost.length; i++) {
      const lost = trust[i] === TRUST.LOST ? 1 : 0;
      if (lost !== this.#lost[i]) changed = true;
      this.#lost[i] = lost;
    }
    return changed;
  }

  /** Works out, for every place, the sensors before and behind it and their shares. */
  #placeSensors(): void {
    const stations = this.#stations;
    const first = this.#nextLeft(0);
    this.#sensorsLeft = 0;
    for (let i = 0; i < stations.length; i++) this.#sensorsLeft += 1 - this.#lost[i];
    if (this.#sensorsLeft === 0) return;
    let before = first;
    let behind = first;
    for (let place = 0; place < this.#placeCount; place++) {
      const station = place / (this.#placeCount - 1);
      while (behind < stations.length && stations[behind] <= station) {
        before = behind;
        behind = this.#nextLeft(behind + 1);
      }
      const between = behind < stations.length && before !== behind;
      this.#before[place] = before;
      this.#behind[place] = between ? behind : before;
      this.#share[place] = between ? (station - stations[before]) / (stations[behind] - stations[before]) : 0;
    }
  }

  /** Index of the first sensor at or after `from` that is not lost; the sensor count when there is none. */
  #nextLeft(from: number): number {
    let i = from;
    while (i < this.#lost.length && this.#lost[i] === 1) i++;
    return i;
  }
}

/** Angle about the body's x axis after heading and pitch are taken off, rad, right side down positive. */
function rollOf(q: Float64Array): number {
  return Math.atan2(2 * (q[0] * q[1] + q[2] * q[3]), 1 - 2 * (q[1] * q[1] + q[2] * q[2]));
}
