import { expect, test } from "vitest";
import { HarmonicFit } from "../../bridge/numeric/harmonic-fit.ts";
import { Random } from "../../bridge/rehearsal/random.ts";

const RATE_HZ = 100;
const TAU = 2 * Math.PI;
/** 1 - exp(-step / memory) for a memory of two seconds. */
const SHARE = 1 - Math.exp(-1 / RATE_HZ / 2);

/** Mean, cosine and sine of the first and of the second harmonic, of two channels. */
const TRUE = [0.4, 1, -0.5, 0.2, 0.1, -3, 0, 2, -0.3, 0.05] as const;

function valuesAt(phase: number, out: Float64Array): Float64Array {
  for (let c = 0; c < 2; c++) {
    const [m, a1, b1, a2, b2] = TRUE.slice(5 * c, 5 * c + 5) as [number, number, number, number, number];
    out[c] =
      m + a1 * Math.cos(phase) + b1 * Math.sin(phase) + a2 * Math.cos(2 * phase) + b2 * Math.sin(2 * phase);
  }
  return out;
}

const worstError = (fit: HarmonicFit) =>
  Math.max(...TRUE.map((value, i) => Math.abs(fit.coefficients[i]! - value)));

test("a noiseless sum of harmonics is found within one beat, at any rate of beats and uneven steps", () => {
  for (const frequencyHz of [0.3, 1.1, 8]) {
    const random = Random.forStream(5, 0);
    const fit = new HarmonicFit({ channels: 2, harmonics: 2 });
    const values = new Float64Array(2);
    for (let timeS = 0; timeS < 1.1 / frequencyHz; ) {
      const stepS = random.between(0.2, 1.8) / RATE_HZ;
      timeS += stepS;
      const phase = TAU * frequencyHz * timeS;
      fit.step(phase, 1 - Math.exp((-stepS * frequencyHz) / 2), valuesAt(phase, values));
    }
    // What holds unknown coefficients still is a thousandth of the data's weight; over one beat as much of the error stays
    // as the least eigenvalue, 1/2, leaves of it a few times over.
    expect(worstError(fit)).toBeLessThan(0.05);
    expect(fit.residual[0]! / fit.residual[1]!).toBeLessThan(0.01);
  }
});

test("after some beats nothing is left of the start, and the fit is told at any phase", () => {
  const fit = new HarmonicFit({ channels: 2, harmonics: 2 });
  const values = new Float64Array(2);
  for (let i = 0; i < 3000; i++) fit.step(0.1 * i, SHARE, valuesAt(0.1 * i, values));
  // 30 s are 15 memories: e^-15 of the start, 3e-7.
  expect(worstError(fit)).toBeLessThan(1e-6);
  expect(fit.fitted[1]).toBeCloseTo(values[1]!, 6);
  valuesAt(1.234, values);
  expect(fit.valueAt(0, 1.234)).toBeCloseTo(values[0]!, 6);
  expect(fit.valueAt(1, 1.234)).toBeCloseTo(values[1]!, 6);
});

test("the recursion is the weighted least-squares fit, up to what holds the coefficients", () => {
  const random = Random.forStream(2, 0);
  const fit = new HarmonicFit({ channels: 1, harmonics: 1 });
  const rows: { x: number[]; y: number }[] = [];
  for (let i = 0; i < 2000; i++) {
    const phase = 0.07 * i + Math.sin(0.01 * i);
    const y = 2 + Math.cos(phase) - 0.5 * Math.sin(phase) + random.normal();
    rows.push({ x: [1, Math.cos(phase), Math.sin(phase)], y });
    fit.step(phase, SHARE, Float64Array.of(y));
  }
  const expected = leastSquares(
    rows.map((row, i) => ({ ...row, weight: (1 - SHARE) ** (rows.length - 1 - i) })),
  );
  // The hold is a five-hundredth of a harmonic's own weight, and acts on what a memory of noise moves, some 0.1.
  expected.forEach((value, i) => {
    expect(Math.abs(fit.coefficients[i]! - value)).toBeLessThan(0.001);
  });
});

test("the mean squares tell noise from variation", () => {
  const random = Random.forStream(3, 0);
  const fit = new HarmonicFit({ channels: 1, harmonics: 3 });
  let left = 0;
  let whole = 0;
  for (let i = 0; i < 60_000; i++) {
    fit.step(0.07 * i, SHARE, Float64Array.of(5 + 2 * Math.sin(0.07 * i) + 0.5 * random.normal()));
    if (i < 2000) continue;
    left += fit.residual[0]! / 58_000;
    whole += fit.residual[1]! / 58_000;
  }
  // The variance of the noise is 0.25, of the sine 2. Seven coefficients over 400 readings of memory make 2 % either way.
  expect(Math.abs(left / 0.25 - 1)).toBeLessThan(0.03);
  expect(Math.abs(whole / 2.25 - 1)).toBeLessThan(0.02);
});

test("an absent value leaves its channel's coefficients and nothing else", () => {
  const fit = new HarmonicFit({ channels: 2, harmonics: 2 });
  const values = new Float64Array(2);
  for (let i = 0; i < 500; i++) fit.step(0.1 * i, SHARE, valuesAt(0.1 * i, values));
  const kept = fit.coefficients.slice(0, 5);
  for (let i = 500; i < 800; i++) {
    valuesAt(0.1 * i, values);
    values[0] = Number.NaN;
    values[1]! += 7;
    fit.step(0.1 * i, SHARE, values);
  }
  expect([...fit.coefficients.subarray(0, 5)]).toEqual([...kept]);
  expect(fit.coefficients[5]).toBeGreaterThan(TRUE[5] + 4);
  expect(fit.fitted[0]).toBeCloseTo(valuesAt(79.9, values)[0]!, 1);
});

test("a phase that stands still for hours, with noise, moves no harmonic far, and the fit is right a beat after", () => {
  const random = Random.forStream(4, 0);
  const fit = new HarmonicFit({ channels: 2, harmonics: 2 });
  const values = new Float64Array(2);
  for (let i = 0; i < 1000; i++) fit.step(0.1 * i, SHARE, valuesAt(0.1 * i, values));
  for (let i = 0; i < 400_000; i++) {
    valuesAt(100, values);
    values[0]! += 0.01 * random.normal();
    values[1]! += 0.01 * random.normal();
    fit.step(100, SHARE, values);
  }
  expect(worstError(fit)).toBeLessThan(0.05); // the noise moves the one direction that is seen, and averages there
  for (let i = 0; i < 100; i++) fit.step(100 + 0.1 * i, SHARE, valuesAt(100 + 0.1 * i, values));
  expect(worstError(fit)).toBeLessThan(0.05);
  fit.reset();
  expect(fit.filled).toBe(0);
  expect(Math.max(...fit.coefficients)).toBe(0);
});

/** Three unknowns by the normal equations and Cramer's rule. */
function leastSquares(rows: readonly { x: number[]; y: number; weight: number }[]): number[] {
  const sum = (f: (row: (typeof rows)[number]) => number) =>
    rows.reduce((total, row) => total + row.weight * f(row), 0);
  const a = [0, 1, 2].map((i) => [0, 1, 2].map((j) => sum(({ x }) => x[i]! * x[j]!)));
  const b = [0, 1, 2].map((i) => sum(({ x, y }) => x[i]! * y));
  const det = (m: number[][]) =>
    m[0]![0]! * (m[1]![1]! * m[2]![2]! - m[1]![2]! * m[2]![1]!) -
    m[0]![1]! * (m[1]![0]! * m[2]![2]! - m[1]![2]! * m[2]![0]!) +
    m[0]![2]! * (m[1]![0]! * m[2]![1]! - m[1]![1]! * m[2]![0]!);
  return [0, 1, 2].map((k) => det(a.map((row, i) => row.map((v, j) => (j === k ? b[i]! : v)))) / det(a));
}
