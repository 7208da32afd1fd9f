import { expect, test } from "vitest";
import { addWander, clear, type Jet, newJet, SteppedSignal } from "../../bridge/rehearsal/signal.ts";

const STEPS = [
  { atS: 1, overS: 2, to: 5 },
  { atS: 4, overS: 0.5, to: -1 },
];

function at(add: (out: Jet, timeS: number) => void, timeS: number): Jet {
  const jet = newJet();
  add(jet, timeS);
  return jet;
}

/** Holds a signal's derivatives against central differences of the one below. */
function expectConsistent(add: (out: Jet, timeS: number) => void, fromS: number, toS: number): void {
  const h = 1e-4;
  for (let t = fromS; t < toS; t += 0.0173) {
    const before = at(add, t - h);
    const here = at(add, t);
    const after = at(add, t + h);
    // Central differences: off by h²/6 of the third derivative (here below 1e4) and by rounding 1e-15 / h.
    expect(Math.abs((after.value - before.value) / (2 * h) - here.rate)).toBeLessThan(2e-5);
    expect(Math.abs((after.rate - before.rate) / (2 * h) - here.acceleration)).toBeLessThan(2e-2);
  }
}

test("a stepped signal goes from value to value and stays", () => {
  const signal = new SteppedSignal(2, STEPS);
  const value = (t: number) => at((out, timeS) => signal.addTo(out, timeS), t).value;
  expect(value(0)).toBe(2);
  expect(value(2)).toBeCloseTo(3.5, 12); // half way
  expect(value(3.5)).toBeCloseTo(5, 12);
  expect(value(9)).toBeCloseTo(-1, 12);
});

test("a stepped signal's derivatives are those of its value", () => {
  const signal = new SteppedSignal(2, STEPS);
  expectConsistent((out, timeS) => signal.addTo(out, timeS), 0, 6);
});

test("a stepped signal's integral is that of its value", () => {
  const signal = new SteppedSignal(2, STEPS);
  const h = 1e-4;
  let sum = 0;
  for (let i = 0; i < 60_000; i++) sum += h * at((out, t) => signal.addTo(out, t), (i + 0.5) * h).value;
  // Midpoint rule: h²/24 of the change of slope, far below.
  expect(Math.abs(signal.integral(6) - sum)).toBeLessThan(1e-6);
});

test("a gated wander's derivatives are those of its value, and it is nil before its gate", () => {
  const gateSignal = new SteppedSignal(0, [{ atS: 1, overS: 2, to: 1 }]);
  const gate = newJet();
  const wander = (out: Jet, timeS: number) => {
    clear(gate);
    gateSignal.addTo(gate, timeS);
    addWander(out, { amplitude: 0.3, periodS: 1.7 }, gate, timeS);
  };
  expectConsistent(wander, 0, 6);
  expect(at(wander, 0.9).value).toBe(0);
});
