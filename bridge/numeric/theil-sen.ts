/**
 * A straight line through points some of which may be far off: the median of the slopes of all pairs (H. Theil, Proc. Kon.
 * Ned. Akad. Wetensch. A 53 (1950) 386), with the interval of P. K. Sen (J. Am. Stat. Assoc. 63 (1968) 1379), which holds
 * the slope with 95 % by the variance of Kendall's rank sum. Fewer than five points can exclude no slope at that level.
 */

/** Two-sided 95 % of the normal distribution. */
const DEVIATIONS = 1.96;

export interface Line {
  /** Of the values by the unit of time. */
  readonly slope: number;
  /** The interval that holds the slope; from -Infinity to Infinity for too few points. */
  readonly low: number;
  readonly high: number;
  /** Value at time 0: the median of what each point says. */
  readonly start: number;
}

/**
 * @param times in any order; pairs at one time tell no slope and are left out
 * @param values as many
 * @returns null when no two points differ in time
 */
export function theilSen(times: readonly number[], values: readonly number[]): Line | null {
  const slopes: number[] = [];
  for (let i = 0; i < times.length; i++) {
    for (let j = 0; j < i; j++) {
      if (times[i] !== times[j]) slopes.push((values[i]! - values[j]!) / (times[i]! - times[j]!));
    }
  }
  if (slopes.length === 0) return null;
  slopes.sort((a, b) => a - b);
  const n = times.length;
  const spread = DEVIATIONS * Math.sqrt((n * (n - 1) * (2 * n + 5)) / 18);
  // So many of the least and of the greatest slopes lie outside, the last of them being the bound.
  const outside = Math.round((slopes.length - spread) / 2);
  const slope = median(slopes);
  const starts = times.map((time, i) => values[i]! - slope * time).sort((a, b) => a - b);
  return {
    slope,
    low: outside < 1 ? Number.NEGATIVE_INFINITY : slopes[outside - 1]!,
    high: outside < 1 ? Number.POSITIVE_INFINITY : slopes[slopes.length - outside]!,
    start: median(starts),
  };
}

function median(sorted: readonly number[]): number {
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle]! : (sorted[middle - 1]! + sorted[middle]!) / 2;
}
