import { expect, test } from "vitest";
import { FlagBook } from "../../bridge/health/flag-book.ts";
import { HeadingFallback } from "../../bridge/health/heading-fallback.ts";
import { rehearse } from "../support/rehearse.ts";

const CAUSE = "rig-wide magnetic interference";
const KIND = "heading held by the body";

function bench() {
  const book = new FlagBook([{ name: "S1", station: 0.5 }]);
  const fallback = new HeadingFallback(book);
  let timeS = 0;
  const after = (seconds: number) => {
    let held = false;
    for (const endS = timeS + seconds; timeS < endS; timeS += 0.01) held = fallback.observe(timeS);
    return held;
  };
  return { book, after, now: () => timeS };
}

test("headings are held by the body after five seconds of interference along the whole rig, with a flag", () => {
  const { book, after, now } = bench();
  book.raise(CAUSE, -1, "alarm", now(), "");
  expect(after(4.9)).toBe(false);
  expect(book.find(KIND, -1)).toBeNull();
  expect(after(0.2)).toBe(true);
  expect(book.find(KIND, -1)).toMatchObject({ severity: "notice", sensor: -1 });
});

test("they go back to the magnetometers after ten clean seconds; the flag ends when those have drawn them back", () => {
  const { book, after, now } = bench();
  book.raise(CAUSE, -1, "alarm", now(), "");
  after(6);
  book.clear(CAUSE, -1, now());
  expect(after(9)).toBe(true);
  book.raise(CAUSE, -1, "alarm", now(), "");
  after(1);
  book.clear(CAUSE, -1, now());
  expect(after(9.9)).toBe(true);
  expect(after(0.2)).toBe(false);
  expect(book.find(KIND, -1)?.detail).toBe("magnetometers take over again");
  after(17.8);
  expect(book.find(KIND, -1)).not.toBeNull();
  after(0.4);
  expect(book.find(KIND, -1)).toBeNull();
});

test("the notice of a building's own field changes nothing", () => {
  const { book, after, now } = bench();
  book.raise(CAUSE, -1, "notice", now(), "", "building field");
  expect(after(20)).toBe(false);
  expect(book.find(KIND, -1)).toBeNull();
});

test("in a rehearsal with 20 s of steel nearby no heading jumps, neither going over nor coming back", async () => {
  const sources = new Set<string>();
  let before: number[] | undefined;
  let fastest = 0;
  const { flags, pipeline } = await rehearse(
    { rig: "ribbon-foil", durationS: 85, faults: ["field@15+20"] },
    ({ timeS, fusion }, source) => {
      sources.add(fusion.heading);
      if (timeS < 10) return;
      const truth = source.truthAt(timeS).orientations;
      const errors = [0, 1, 2, 3, 4, 5].map((i) => yaw(fusion.orientations, i) - yaw(truth, i));
      before?.forEach((error, i) => {
        const change = Math.abs(errors[i]! - error);
        fastest = Math.max(fastest, Math.min(change, 2 * Math.PI - change));
      });
      before = errors;
    },
  );
  expect([...sources]).toEqual(["magnetic", "relative"]);
  expect(flags.map((flag) => flag.kind)).toEqual([CAUSE, KIND]);
  expect(pipeline.fusion.heading).toBe("magnetic");
  expect(pipeline.flags.open).toEqual([]);
  // 0.2° between sweeps: 5 °/s of correction, and what the gyroscopes' noise and the beat itself make of a step.
  expect((fastest * 180) / Math.PI).toBeLessThan(0.2);
});

function yaw(q: ArrayLike<number>, sensor: number): number {
  const [w, x, y, z] = [0, 1, 2, 3].map((i) => q[4 * sensor + i]!) as [number, number, number, number];
  return Math.atan2(2 * (x * y + w * z), 1 - 2 * (y * y + z * z));
}
