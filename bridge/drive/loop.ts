/** The loop a signal draws against its reference over one whole cycle, and its area. */
import type { Comparison } from "./comparison.ts";

/** Points of a drawn loop. */
export const LOOP_POINTS = 48;

export interface Loop {
  /** About the cycle's means, as many numbers each, first and last joined. */
  readonly reference: readonly number[];
  readonly measured: readonly number[];
  /** Enclosed, reference unit times signal unit; positive when the signal lags: pi gain amplitude² sin(lag angle) of a pure tone. */
  readonly area: number;
}

/**
 * @param reference column of the comparison's ring
 * @param measured likewise
 * @returns the newest whole cycle's loop; null while there is none, or where samples are missing
 */
export function loopOf({ ring, cycles }: Comparison, reference: number, measured: number): Loop | null {
  if (cycles.count === 0) return null;
  const start = ring.indexAt(cycles.lastStartS);
  const end = ring.indexAt(cycles.endS);
  const stride = Math.max(1, Math.ceil((end - start) / LOOP_POINTS));
  const drawn = (values: Float64Array): number[] => {
    const cycle = values.subarray(start, end);
    const mean = cycle.reduce((sum, value) => sum + value, 0) / cycle.length;
    return [...cycle].map((value) => value - mean);
  };
  const r = drawn(ring.columns[reference]);
  const y = drawn(ring.columns[measured]);
  const area = areaOf(r, y);
  if (Number.isNaN(area)) return null;
  const thinned = (values: readonly number[]) => values.filter((_, i) => i % stride === 0);
  return { reference: thinned(r), measured: thinned(y), area };
}

/** Area of the polygon, positive anticlockwise with x to the right (the surveyor's formula). */
function areaOf(x: readonly number[], y: readonly number[]): number {
  let twice = 0;
  for (let i = 0; i < x.length; i++) {
    const next = (i + 1) % x.length;
    twice += x[i] * y[next] - x[next] * y[i];
  }
  return 0.5 * twice;
}
