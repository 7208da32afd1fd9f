/**
 * Orientation between two sensors on the sphere, at an even rate (slerp, Shoemake 1985, SIGGRAPH '85), the shorter way
 * round; before the first and beyond the last sensor it is theirs.
 */
import { arcBetween, normalise, overSine, rotate, signOfDot, slerpKnown } from "../numeric/quaternion.ts";
import { type Between, stationOf } from "./between.ts";

const AHEAD = Float64Array.of(1, 0, 0);

export class Slerp implements Between {
  readonly #stations: readonly number[];
  /** Per place: the sensors before and behind it, and the share of the one behind. */
  readonly #before: Uint16Array;
  readonly #behind: Uint16Array;
  readonly #share: Float64Array;

  // What all places of a gap have in common, at the sensor before it.
  /** Angle between the two sensors. */
  readonly #arc: Float64Array;
  /** One over its sine, 0 where that is too small; and -1 where the shorter way is by the negative quaternion. */
  readonly #overSine: Float64Array;
  readonly #sign: Float64Array;
  readonly #left: Uint16Array;
  #count = 0;
  #orientations: Float64Array = new Float64Array(0);
  readonly #between = new Float64Array(4);

  constructor(stations: readonly number[], placeCount: number) {
    this.#stations = stations;
    this.#before = new Uint16Array(placeCount);
    this.#behind = new Uint16Array(placeCount);
    this.#share = new Float64Array(placeCount);
    this.#arc = new Float64Array(stations.length);
    this.#overSine = new Float64Array(stations.length);
    this.#sign = new Float64Array(stations.length);
    this.#left = new Uint16Array(stations.length);
  }

  place(left: Uint16Array, count: number): void {
    this.#left.set(left);
    this.#count = count;
    const stations = this.#stations;
    const places = this.#share.length;
    let next = 0;
    for (let place = 0; place < places; place++) {
      const station = stationOf(place, places);
      while (next < count && stations[left[next]] <= station) next++;
      const before = left[Math.max(0, next - 1)];
      const behind = left[Math.min(next, count - 1)];
      const between = before !== behind;
      this.#before[place] = before;
      this.#behind[place] = behind;
      this.#share[place] = between ? (station - stations[before]) / (stations[behind] - stations[before]) : 0;
    }
  }

  take(orientations: Float64Array): void {
    this.#orientations = orientations;
    for (let gap = 0; gap < this.#count; gap++) {
      const before = this.#left[gap];
      const behind = this.#left[Math.min(gap + 1, this.#count - 1)];
      const arc = arcBetween(orientations, orientations, 4 * before, 4 * behind);
      this.#arc[before] = arc;
      this.#overSine[before] = overSine(arc);
      this.#sign[before] = signOfDot(orientations, orientations, 4 * before, 4 * behind);
    }
  }

  axes(out: Float64Array): void {
    const q = this.#between;
    for (let place = 1, to = 0; place < this.#share.length; place += 2, to += 3) {
      this.at(place, q);
      rotate(out, q, AHEAD, to);
    }
  }

  at(place: number, out: Float64Array): void {
    const q = this.#orientations;
    const before = this.#before[place];
    const arc = this.#arc[before];
    const over = this.#overSine[before];
    const sign = this.#sign[before];
    slerpKnown(out, q, q, this.#share[place], arc, over, sign, 0, 4 * before, 4 * this.#behind[place]);
    normalise(out, out);
  }
}
