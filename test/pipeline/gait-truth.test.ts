import { expect, test } from "vitest";
import { Pipeline } from "../../bridge/pipeline.ts";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { START_MS } from "../support/rehearse.ts";

/** The heading of every sensor has settled by then, s. */
const SETTLED_S = 25;

test.each([1.1, 3])(
  "a rehearsed six-sensor swimmer of %d beats a second, 100 Hz, 60 s: frequency within 0.2 percent, one steady bout",
  async (frequencyHz) => {
    const frequencies: number[] = [];
    const bouts: number[] = [];
    const rig = loadRig("ribbon-foil");
    const pipeline = new Pipeline(rig, {
      startedAt: new Date(START_MS),
      ring: false,
      observer: {
        beat({ startS, numbers, doubts }) {
          if (startS < SETTLED_S) return;
          frequencies.push(numbers.frequencyHz);
          expect(doubts.tailAmplitudeM).toBe(0);
        },
        bout: ({ startS, endS }) => bouts.push(endS - startS),
      },
    });
    const source = new RehearsalSource({
      rig,
      rate: "max",
      startMs: START_MS,
      durationS: 60,
      swimmer: { frequencyHz },
    });
    await source.run({
      bytes: (chunk, hostTimeMs) => pipeline.bytes(chunk, hostTimeMs),
      linkState() {},
      mark() {},
    });
    pipeline.finish();
    expect(frequencies.length).toBeGreaterThan(30 * frequencyHz);
    const mean = frequencies.reduce((sum, f) => sum + f) / frequencies.length;
    expect(Math.abs(mean / frequencyHz - 1)).toBeLessThan(0.002);
    const square = frequencies.reduce((sum, f) => sum + (f / frequencyHz - 1) ** 2, 0) / frequencies.length;
    expect(Math.sqrt(square)).toBeLessThan(0.002);
    // Rest and start take 5 s; the bout begins once the beats have grown, and settling headings do not break it.
    expect(Math.max(...bouts)).toBeGreaterThan(48);
  },
);
