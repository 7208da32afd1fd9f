import { expect, test } from "vitest";
import { CycleFit, TERMS } from "../../bridge/wave/cycle-fit.ts";
import { CycleMemory } from "../../bridge/wave/cycle-memory.ts";
import { noise } from "./waves.ts";

const PERIOD_S = 0.73;
const TRUTH = [0.3, 1, -0.4, 0.2, 0.1, -0.05, 0.07];

function value(t: number, startS: number): number {
  const theta = (2 * Math.PI * (t - startS)) / PERIOD_S;
  return [1, 2, 3].reduce(
    (sum, h) => sum + TRUTH[2 * h - 1]! * Math.cos(h * theta) + TRUTH[2 * h]! * Math.sin(h * theta),
    TRUTH[0]!,
  );
}

/** Fits one cycle from 1.003 s on, seen at the given times. */
function fitAt(times: readonly number[], disturb: () => number = () => 0): CycleFit {
  const memory = new CycleMemory(100, 5, 1);
  const startS = 1.003;
  for (const t of times) memory.values[memory.begin(t, 0)] = value(t, startS) + disturb();
  const fit = new CycleFit(memory);
  fit.fit(startS, startS + PERIOD_S);
  return fit;
}

const even = Array.from({ length: 300 }, (_, i) => i / 100);

test("mean and three harmonics come out exactly, though no sweep falls on the cycle's ends", () => {
  const { terms, residual, sweeps, harmonics } = fitAt(even);
  expect(harmonics).toBe(3);
  expect(sweeps).toBe(73);
  expect(Math.max(...TRUTH.map((term, i) => Math.abs(terms[i] - term)))).toBeLessThan(1e-12);
  // The squares' difference is exact to 1e-16 of them.
  expect(residual[0]).toBeLessThan(1e-7);
});

test("and just so from sweeps unevenly spaced, with some lost", () => {
  const next = noise();
  const uneven = even.map((t) => t + 0.004 * next()).filter(() => next() > -0.6);
  const { terms } = fitAt(uneven);
  expect(Math.max(...TRUTH.map((term, i) => Math.abs(terms[i] - term)))).toBeLessThan(1e-11);
});

test("the residual is the noise", () => {
  const next = noise();
  // Evenly spread from -0.01 to 0.01 is 0.01 / sqrt(3) RMS; 73 of them know it to a tenth.
  expect(fitAt(even, () => 0.01 * next()).residual[0]! * Math.sqrt(3)).toBeCloseTo(0.01, 2);
});

test("fewer sweeps, or a wide hole, allow fewer harmonics", () => {
  const every = (n: number) => even.filter((_, i) => i % n === 0);
  expect([6, 8, 10, 14, 30].map((n) => fitAt(every(n)).harmonics)).toEqual([3, 2, 2, 1, 0]);
  const holed = (fromS: number, toS: number) => fitAt(even.filter((t) => t < fromS || t > toS)).harmonics;
  expect([holed(1.2, 1.3), holed(1.2, 1.36), holed(1.2, 1.5), holed(1.2, 1.7)]).toEqual([3, 2, 1, 0]);
});

test("a cycle that has been overwritten in part is not fitted", () => {
  const memory = new CycleMemory(10, 1, 1);
  for (let i = 0; i < 40; i++) memory.values[memory.begin(i / 10, 0)] = 1;
  const fit = new CycleFit(memory);
  fit.fit(0.05, 2.05);
  expect(fit.harmonics).toBe(0);
  expect(fit.terms.subarray(0, TERMS).every((term) => term === 0)).toBe(true);
});
