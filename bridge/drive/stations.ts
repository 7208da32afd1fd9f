/** The stations of the midline that are compared, with a drive or with a camera. */

export const COMPARED_STATIONS = 11;
/** Evenly spaced from nose to tail tip. */
export const COMPARED_PLACES: readonly number[] = Array.from(
  { length: COMPARED_STATIONS },
  (_, k) => k / (COMPARED_STATIONS - 1),
);

/**
 * Writes x and y of each compared station.
 * @param positions 3 per point, m; so many points that the stations fall on points
 */
export function stationsInto(out: Float64Array, positions: Float64Array): void {
  const every = (positions.length / 3 - 1) / (COMPARED_STATIONS - 1);
  for (let k = 0; k < COMPARED_STATIONS; k++) {
    out[2 * k] = positions[3 * every * k];
    out[2 * k + 1] = positions[3 * every * k + 1];
  }
}

/** Likewise against the nose: a camera and the bridge need not agree on where the body is. */
export function stationsFromNoseInto(out: Float64Array, positions: Float64Array): void {
  stationsInto(out, positions);
  for (let i = 0; i < out.length; i++) out[i] -= positions[i % 2];
}

/**
 * Writes the displacement of points to the left of an axis through the origin, from `outAt` on.
 * @param points x and y in turn, m
 * @param heading of the axis, rad from east, anticlockwise
 */
export function lateralsInto(out: Float64Array, points: Float64Array, heading: number, outAt = 0): void {
  const cos = Math.cos(heading);
  const sin = Math.sin(heading);
  for (let k = 0; 2 * k < points.length; k++) out[outAt + k] = cos * points[2 * k + 1] - sin * points[2 * k];
}
