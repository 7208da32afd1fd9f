import { expect, it } from "vitest";
import { type Order, PhaseOrder } from "../../bridge/numeric/phase-order.ts";

const STATIONS = [0.1, 0.3, 0.5, 0.7, 0.9];

/** Watches four seconds of a wave; `lag` gives each sensor's lag, rad. */
function judge(lag: (i: number) => number, amplitude: (i: number) => number = () => 1, hz = 1.3): Order {
  const order = new PhaseOrder(STATIONS);
  for (let k = 0; k < 200; k++) {
    const timeS = k / 50;
    order.add(
      timeS,
      Float64Array.from(STATIONS, (_, i) => amplitude(i) * Math.cos(2 * Math.PI * hz * timeS - lag(i))),
    );
  }
  return order.judge(0.1, 0.05);
}

it("a wave from nose to tail, or from tail to nose, is in order", () => {
  expect(judge((i) => 6 * STATIONS[i]!)).toEqual({ kind: "in order" });
  expect(judge((i) => -6 * STATIONS[i]!)).toEqual({ kind: "in order" });
});

it("two exchanged sensors are found", () => {
  const places = [0, 3, 2, 1, 4];
  expect(judge((i) => 6 * STATIONS[places[i]!]!)).toEqual({ kind: "swapped", first: 1, second: 3 });
});

it("a standing wave has no order", () => {
  expect(judge((i) => (i < 3 ? 0 : Math.PI))).toEqual({ kind: "unclear" });
  expect(judge(() => 0)).toEqual({ kind: "unclear" });
});

it("sensors that hardly move take no part", () => {
  expect(
    judge(
      (i) => (i === 2 ? 0 : 5 * STATIONS[i]!),
      (i) => (i === 2 ? 0.01 : 1),
    ),
  ).toEqual({ kind: "in order" });
  expect(
    judge(
      (i) => 6 * STATIONS[i]!,
      (i) => (i < 2 ? 0.01 : 1),
    ),
  ).toEqual({ kind: "unclear" });
});

it("disorder that no single exchange mends is not called one", () => {
  const places = [2, 4, 1, 0, 3];
  expect(judge((i) => 6 * STATIONS[places[i]!]!)).toEqual({ kind: "unclear" });
});

it("nothing seen is unclear, and a reset forgets", () => {
  const order = new PhaseOrder(STATIONS);
  expect(order.judge(0.1, 0.05)).toEqual({ kind: "unclear" });
  order.add(0, new Float64Array(5));
  order.reset();
  expect(order.judge(0.1, 0.05)).toEqual({ kind: "unclear" });
});
