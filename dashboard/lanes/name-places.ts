/**
 * Places names along the ruler so that none covers another: in one row, else staggered in
 * two or three, else thinned out evenly.
 */

/** Every so many names are kept when not all fit. */
const EVERY = [2, 3, 4, 5, 8, 10, 16, 20, 32, 50, 100];

/** More names than this in several rows are a thicket. */
const MOST_STAGGERED = 24;

export interface Placing {
  /** The row of each name, -1 where it is left out. */
  readonly rows: readonly number[];
  /** Names were left out; the second row is free. */
  readonly thinned: boolean;
}

/**
 * @param centres of the names, ascending, CSS pixels
 * @param widths of the names
 * @param gap least distance between two names in a row
 */
export function placeNames(centres: readonly number[], widths: readonly number[], gap: number): Placing {
  const all = centres.map((_, i) => i);
  const kept = (every: number) => all.map((i) => (i % every === 0 ? 0 : -1));
  if (fits(centres, widths, gap, kept(1))) return { rows: kept(1), thinned: false };
  for (const rowCount of centres.length <= MOST_STAGGERED ? [2, 3] : []) {
    const staggered = all.map((i) => i % rowCount);
    if (fits(centres, widths, gap, staggered)) return { rows: staggered, thinned: false };
  }
  const every = EVERY.find((n) => fits(centres, widths, gap, kept(n))) ?? centres.length;
  return { rows: kept(every), thinned: true };
}

/** Whether names in the same row keep their distance. */
function fits(
  centres: readonly number[],
  widths: readonly number[],
  gap: number,
  rows: readonly number[],
): boolean {
  const ends = new Map<number, number>();
  for (let i = 0; i < centres.length; i++) {
    const row = rows[i];
    if (row < 0) continue;
    if (centres[i] - widths[i] / 2 < (ends.get(row) ?? Number.NEGATIVE_INFINITY) + gap) return false;
    ends.set(row, centres[i] + widths[i] / 2);
  }
  return true;
}
