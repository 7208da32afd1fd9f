/** How the orientation between the sensors is found: what midline.ts asks of each way of doing it. */

export interface Between {
  /**
   * Other sensors carry the shape from now on.
   * @param left their indices, nose to tail; the first `count` of the array, at least one
   */
  place(left: Uint16Array, count: number): void;
  /** Takes a sweep's orientations: 4 per sensor, body axes to earth. Borrowed until the next. */
  take(orientations: Float64Array): void;
  /**
   * Writes the body's x axis, in earth axes, at the odd places, nose to tail, as of the last take: 3 numbers each. All in
   * one call: this is every sweep's.
   */
  axes(out: Float64Array): void;
  /** Writes the orientation at a place to `out` (4), as of the last take. */
  at(place: number, out: Float64Array): void;
}

/** Station of a place: places are evenly spaced from nose (0) to tail tip (1). */
export function stationOf(place: number, placeCount: number): number {
  return place / (placeCount - 1);
}
