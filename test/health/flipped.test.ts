import { expect, it } from "vitest";
import { FlippedSensors } from "../../bridge/health/flipped.ts";
import type { Sweep } from "../../bridge/sweep.ts";
import { halfTurn, Swum } from "./swum.ts";

function swim(
  swum: Swum,
  seconds: number,
  spoil?: (sweep: Sweep) => void,
  detector = new FlippedSensors(swum.setup),
) {
  swum.run(seconds, (sweep) => detector.observe(sweep, false), spoil);
  return detector;
}

const EVERY = Array.from({ length: 6 }, (_, i) => i);

it.each(EVERY)(
  "a sensor turned over about its long or its cross axis is told, and only that one: %i",
  (i) => {
    for (const axis of [0, 1]) {
      const swum = new Swum("ribbon-foil");
      swim(swum, 13, halfTurn(i, axis));
      expect(swum.raised).toEqual([`sensor flipped@${i}: upside down against its neighbours`]);
    }
  },
);

it.each(EVERY)("a sensor that faces the tail is told, and only that one: %i", (i) => {
  for (const gait of ["carangiform", "anguilliform"] as const) {
    const swum = new Swum("ribbon-foil", { gait });
    swim(swum, 17, halfTurn(i, 2));
    expect(swum.raised).toEqual([`sensor flipped@${i}: facing the tail against its neighbours`]);
  }
});

it("two flipped sensors are both told, as long as a good one lies between them", () => {
  const swum = new Swum("long-dummy");
  swim(swum, 17, (sweep) => {
    halfTurn(8, 2)(sweep);
    halfTurn(10, 2)(sweep);
  });
  expect(swum.flags.map(({ sensor }) => sensor).sort()).toEqual([10, 8]);
});

it("upside down shows at rest too, and ends once the sensor sits right", () => {
  const swum = new Swum("ribbon-foil", { restS: 100 });
  const detector = swim(swum, 13, halfTurn(2, 0));
  expect(swum.raised).toHaveLength(1);
  swim(swum, 9, undefined, detector);
  expect(swum.setup.book.open).toEqual([]);
  // Judged at the ends of windows of 4 s.
  expect(swum.flags[0]!.endS).toBe(12);
});

it("facing the tail cannot be seen at rest, and is not forgotten there", () => {
  const swum = new Swum("ribbon-foil", { changes: [{ atS: 20, overS: 1, amplitude: 0 }] });
  swim(swum, 40, halfTurn(3, 2));
  expect(swum.setup.book.open).toHaveLength(1);
  expect(swum.raised).toHaveLength(1);
  const still = new Swum("ribbon-foil", { restS: 100 });
  swim(still, 20, halfTurn(3, 2));
  expect(still.flags).toEqual([]);
});

it("with two sensors nobody can tell which one is the odd one", () => {
  const swum = new Swum("ribbon-foil", {}, 2);
  swim(swum, 20, halfTurn(1, 0));
  expect(swum.flags).toEqual([]);
});

it.each([
  { rig: "ribbon-foil", frequencyHz: 0.6, bend: 0.7 },
  { rig: "ribbon-foil", frequencyHz: 3, bend: 0 },
  { rig: "long-dummy", frequencyHz: 0.6, bend: 0 },
  { rig: "long-dummy", frequencyHz: 2.1, bend: 0.7 },
] as const)("a healthy body is not accused: %o", ({ rig, ...swimmer }) => {
  const swum = new Swum(rig, swimmer);
  swim(swum, 17);
  expect(swum.flags).toEqual([]);
});
