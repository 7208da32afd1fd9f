/**
 * The interval between a table's rows, and whether the rows sit on a regular grid.
 *
 * Rule: the interval is the mean of the steps within a tenth of the median step. Rows are regular when at least 95 of 100
 * steps lie within a tenth of an interval of a whole number of intervals. In regular data a step of 1.5 intervals or more
 * means that rows are missing; in irregular data a long step says nothing, and rows are only counted.
 */

export interface Grid {
  readonly intervalUs: number;
  readonly regular: boolean;
}

const NEAR = 0.1;
const REGULAR_SHARE = 0.95;

/**
 * @param times row times of each table, µs, increasing
 * @param nominalUs the interval to assume where no table has two rows
 */
export function findGrid(times: readonly (readonly number[])[], nominalUs: number): Grid {
  const count = times.reduce((sum, table) => sum + Math.max(0, table.length - 1), 0);
  if (count === 0) return { intervalUs: nominalUs, regular: true };
  const steps = new Float64Array(count);
  let filled = 0;
  for (const table of times) {
    for (let i = 1; i < table.length; i++) steps[filled++] = table[i]! - table[i - 1]!;
  }
  steps.sort();
  const median = steps[count >> 1]!;
  const single = steps.filter((step) => Math.abs(step - median) <= NEAR * median);
  const intervalUs = single.reduce((sum, step) => sum + step, 0) / single.length;
  const onGrid = steps.filter(
    (step) => Math.abs(step - intervalUs * intervals(step, intervalUs)) <= NEAR * intervalUs,
  );
  return { intervalUs, regular: onGrid.length >= REGULAR_SHARE * count };
}

/** How many sweeps a step of the sequence counts: the nearest whole number of intervals in regular data, else one. */
export function sequenceStep(stepUs: number, { intervalUs, regular }: Grid): number {
  return regular ? intervals(stepUs, intervalUs) : 1;
}

function intervals(stepUs: number, intervalUs: number): number {
  return Math.max(1, Math.round(stepUs / intervalUs));
}
