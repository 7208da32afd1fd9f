import { expect, test } from "vitest";
import type { SwimmerOptions } from "../../bridge/rehearsal/swimmer-options.ts";
import { createSweep, type Sweep } from "../../bridge/sweep.ts";
import { Rhythm } from "../../bridge/wave/rhythm.ts";
import { RehearsedChain } from "../fusion/rehearsed-chain.ts";

const STATIONS = [0.06, 0.24, 0.41, 0.58, 0.75, 0.92];
/** The rehearsed body lies still until then, s. */
const REST_S = 3;

/** Swims through the fusion, noise and wandering pose included; `keep` says which sweeps reach the rhythm. */
function swim(
  swimmer: Partial<SwimmerOptions>,
  untilS: number,
  each: (timeS: number, rhythm: Rhythm) => void,
  keep: (i: number) => boolean = () => true,
): void {
  const chain = new RehearsedChain({ heading: "magnetic", seed: 3, swimmer });
  const rhythm = new Rhythm(STATIONS);
  let sweep: Sweep | undefined;
  let i = 0;
  let lastS = -0.01;
  chain.swim(
    untilS,
    () => {
      if (!keep(i++)) return;
      sweep!.stepS = chain.timeS - lastS;
      lastS = chain.timeS;
      rhythm.step(sweep!, chain.fusion.orientations, chain.fusion.trust);
      each(chain.timeS, rhythm);
    },
    (taken) => {
      sweep = taken;
    },
  );
}

/** RMS of the relative error of frequency, and greatest departure of the phase from an even one, rad, after 20 s. */
function steadiness(swimmer: Partial<SwimmerOptions>, keep?: (i: number) => boolean) {
  const frequencyHz = swimmer.frequencyHz!;
  let squares = 0;
  let count = 0;
  let lowest = Number.POSITIVE_INFINITY;
  let highest = Number.NEGATIVE_INFINITY;
  swim(
    swimmer,
    40,
    (timeS, rhythm) => {
      if (timeS < 20) return;
      squares += (rhythm.frequencyHz! / frequencyHz - 1) ** 2;
      count++;
      const apart = rhythm.phase - 2 * Math.PI * frequencyHz * timeS;
      lowest = Math.min(lowest, apart);
      highest = Math.max(highest, apart);
      expect(rhythm.periodicShare).toBeGreaterThan(0.95);
    },
    keep,
  );
  return { error: Math.sqrt(squares / count), wander: highest - lowest };
}

test.each([
  { gait: "carangiform", frequencyHz: 0.5 },
  { gait: "carangiform", frequencyHz: 1.1 },
  { gait: "anguilliform", frequencyHz: 2.5 },
  { gait: "carangiform", frequencyHz: 5, amplitude: 0.4 },
  { gait: "anguilliform", frequencyHz: 8, amplitude: 0.4 },
] as const)("steady swimming, $gait at $frequencyHz Hz: within 0.2 %, without lag or slip", (swimmer) => {
  const { error, wander } = steadiness(swimmer);
  // The promise. The slowest beat has the most wandering of pose within its memory.
  expect(error).toBeLessThan(0.002);
  expect(wander).toBeLessThan((4 * Math.PI) / 180);
});

test("three sweeps in ten lost change nothing of that", () => {
  const { error, wander } = steadiness({ frequencyHz: 1.5 }, (i) => (i * 7919) % 100 >= 30 || i === 0);
  expect(error).toBeLessThan(0.002);
  expect(wander).toBeLessThan((4 * Math.PI) / 180);
});

test.each([1.1, 2, 4])(
  "a body that starts to beat at %d Hz is followed within about two beats",
  (frequencyHz) => {
    let lockedS = Number.NaN;
    const startS = 0.4;
    swim({ frequencyHz, startS }, 8, (timeS, rhythm) => {
      if (timeS < REST_S) expect(rhythm.frequencyHz).toBeNull();
      const near = rhythm.frequencyHz !== null && Math.abs(rhythm.frequencyHz / frequencyHz - 1) < 0.1;
      if (!near) lockedS = Number.NaN;
      else if (Number.isNaN(lockedS)) lockedS = timeS;
    });
    // Two beats from where the body beats in full; a quarter of a beat more for the first, which is not yet of the others' shape.
    expect((lockedS - REST_S - startS) * frequencyHz).toBeLessThan(2.25);
  },
);

test.each([
  [1, 1.2],
  [2, 1.6],
])("a change from %d to %d Hz is followed to 2 % within two beats", (fromHz, toHz) => {
  let seen = 0;
  swim(
    { frequencyHz: fromHz, changes: [{ atS: 20, overS: 0.01, frequencyHz: toHz }] },
    24,
    (timeS, rhythm) => {
      if (timeS < 20 + 2 / Math.min(fromHz, toHz)) return;
      expect(Math.abs(rhythm.frequencyHz! / toHz - 1)).toBeLessThan(0.02);
      seen++;
    },
  );
  expect(seen).toBeGreaterThan(100);
});

test("a body at rest has no beat", () => {
  swim({ amplitude: 0 }, 30, (_timeS, rhythm) => {
    expect(rhythm.frequencyHz).toBeNull();
  });
});

test("wriggling of many unrelated frequencies is told as not periodic", () => {
  const rhythm = new Rhythm(STATIONS);
  const sweep = createSweep(STATIONS.length);
  const trust = new Uint8Array(STATIONS.length);
  const orientations = new Float64Array(4 * STATIONS.length);
  sweep.stepS = 0.01;
  let beating = 0;
  for (let i = 0; i < 6000; i++) {
    STATIONS.forEach((_, sensor) => {
      // Six sines to a sensor, none a multiple of another, 10 degrees together RMS.
      let yaw = 0;
      for (let k = 0; k < 6; k++) {
        yaw += 0.1 * Math.sin(2 * Math.PI * (0.53 + 0.437 * k + 0.0713 * sensor) * 0.01 * i + k * k + sensor);
      }
      orientations[4 * sensor] = Math.cos(yaw / 2);
      orientations[4 * sensor + 3] = Math.sin(yaw / 2);
    });
    rhythm.step(sweep, orientations, trust);
    if (i > 500 && rhythm.frequencyHz !== null) beating++;
  }
  // Now and then such a sum looks like a beat for a moment.
  expect(beating / 5500).toBeLessThan(0.1);
});
