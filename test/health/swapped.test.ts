import { expect, it } from "vitest";
import { SwappedSensors } from "../../bridge/health/swapped.ts";
import { rotate } from "../../bridge/numeric/quaternion.ts";
import { CHANNELS, HAS_INERTIAL, type Sweep } from "../../bridge/sweep.ts";
import { exchange, Swum } from "./swum.ts";

function swim(
  swum: Swum,
  seconds: number,
  spoil?: (sweep: Sweep) => void,
  detector = new SwappedSensors(swum.setup),
) {
  swum.run(seconds, (sweep) => detector.observe(sweep), spoil);
  return detector;
}

const PAIRS = Array.from({ length: 6 }, (_, i) => i).flatMap((i) =>
  Array.from({ length: 5 - i }, (_, k) => [i, i + 1 + k] as const),
);
// Ends exchanged: the wave then runs backwards nearly everywhere, which one other exchange and a wave from tail to nose
// explain as well.
const TOLD = PAIRS.filter(([i, j]) => !(i === 0 && j === 5));

it.each(TOLD)("sensors %i and %i exchanged are told, by name", (i, j) => {
  const swum = new Swum("ribbon-foil");
  swim(swum, 17, exchange(i, j));
  expect(swum.raised).toEqual([
    `sensors swapped@${i}: the wave runs backwards unless it changes places with S${j + 1}`,
  ]);
});

it("neighbours exchanged are told on a closely set body, wherever they are", () => {
  for (let i = 0; i + 1 < 16; i++) {
    const swum = new Swum("long-dummy");
    swim(swum, 13, exchange(i, i + 1));
    expect(swum.raised).toHaveLength(1);
    expect(swum.flags[0]!.sensor).toBe(i);
  }
});

it("the mounting need not be known: sensors sit any way", () => {
  const turns = [
    [0.5, 0.5, 0.5, 0.5],
    [0.5, -0.5, 0.5, 0.5],
    [0, 1, 0, 0],
    [0.6, 0, 0.8, 0],
    [0, 0, 0, 1],
    [0.8, 0, 0, -0.6],
  ];
  const anyhow = (sweep: Sweep) => {
    turns.forEach((q, i) => {
      for (let part = 0; part < CHANNELS; part += 3)
        rotate(sweep.raw, q, sweep.raw, 9 * i + part, 0, 9 * i + part);
    });
  };
  const right = new Swum("ribbon-foil");
  swim(right, 17, anyhow);
  expect(right.flags).toEqual([]);
  const wrong = new Swum("ribbon-foil");
  swim(wrong, 17, (sweep) => {
    anyhow(sweep);
    exchange(2, 3)(sweep);
  });
  expect(wrong.flags.map(({ sensor }) => sensor)).toEqual([2]);
});

it("the flag stays through a rest and ends once the order is right", () => {
  const swum = new Swum("ribbon-foil", {
    changes: [
      { atS: 14, overS: 1, amplitude: 0 },
      { atS: 24, overS: 1, amplitude: 1 },
    ],
  });
  const detector = swim(swum, 22, exchange(1, 2));
  expect(swum.setup.book.open).toHaveLength(1);
  expect(detector.outOfOrder).toBe(true);
  swim(swum, 12, undefined, detector);
  expect(swum.setup.book.open).toEqual([]);
  expect(detector.outOfOrder).toBe(false);
});

it("a lost sensor leaves the others' order as it is", () => {
  const swum = new Swum("ribbon-foil");
  swim(swum, 20, (sweep) => {
    sweep.present[2] = 0;
  });
  expect(swum.flags).toEqual([]);
  swim(swum, 20, (sweep) => {
    sweep.present[2] = sweep.timeS % 0.5 < 0.1 ? 0 : HAS_INERTIAL;
  });
  expect(swum.flags).toEqual([]);
});

it.each([
  { rig: "ribbon-foil", frequencyHz: 0.6, gait: "carangiform", bend: 0.5 },
  { rig: "ribbon-foil", frequencyHz: 3, gait: "anguilliform", bend: 0 },
  { rig: "long-dummy", frequencyHz: 0.6, gait: "anguilliform", bend: 0 },
  { rig: "long-dummy", frequencyHz: 2.1, gait: "carangiform", bend: 0.5 },
  { rig: "tethered-animal", frequencyHz: 1.1, gait: "carangiform", bend: 0 },
] as const)("a healthy body is not accused: %o", ({ rig, ...swimmer }) => {
  const swum = new Swum(rig, swimmer);
  swim(swum, 17);
  expect(swum.flags).toEqual([]);
});
