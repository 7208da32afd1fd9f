import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { createSweep, type Sweep } from "../../bridge/sweep.ts";
import { type RingRows, TrialRing } from "../../bridge/trial/ring.ts";

const SENSORS = 2;
const POINTS = 3;

function ringOf(capacity: number): TrialRing {
  return new TrialRing({ sensorCount: SENSORS, pointCount: POINTS, rateHz: 1, seconds: capacity });
}

/** Row number n as pushed: every number of it follows from n, so that a row out of place shows. */
interface Row {
  readonly sweep: Sweep;
  readonly orientations: Float64Array;
  readonly trust: Uint8Array;
  readonly midline: Float64Array;
}

function row(n: number): Row {
  const sweep = createSweep(SENSORS);
  sweep.timeS = timeOf(n);
  sweep.raw.forEach((_, i) => {
    sweep.raw[i] = n * 100 + i;
  });
  sweep.present.fill(n % 16);
  sweep.conditions.fill(n % 128);
  return {
    sweep,
    orientations: Float64Array.from({ length: SENSORS * 4 }, (_, i) => n + i / 8),
    trust: Uint8Array.from({ length: SENSORS }, (_, i) => (n + i) % 6),
    midline: Float64Array.from({ length: POINTS * 3 }, (_, i) => -n - i / 16),
  };
}

/** Uneven but strictly increasing. */
function timeOf(n: number): number {
  return n + (n % 3) / 10;
}

function push(ring: TrialRing, n: number): void {
  const { sweep, orientations, trust, midline } = row(n);
  ring.push(sweep, orientations, trust, midline);
}

function expectRows(rows: RingRows, count: number, from: number): void {
  for (let i = 0; i < count; i++) {
    const expected = row(from + i);
    const slice = <T extends Float32Array | Uint8Array>(all: T, width: number): number[] =>
      Array.from(all.subarray(i * width, (i + 1) * width));
    expect(rows.timeS[i]).toBe(expected.sweep.timeS);
    expect(slice(rows.raw, SENSORS * 9)).toEqual([...expected.sweep.raw]);
    expect(slice(rows.orientations, SENSORS * 4)).toEqual([...expected.orientations]);
    expect(slice(rows.midline, POINTS * 3)).toEqual([...expected.midline]);
    expect(slice(rows.present, SENSORS)).toEqual([...expected.sweep.present]);
    expect(slice(rows.conditions, SENSORS)).toEqual([...expected.sweep.conditions]);
    expect(slice(rows.trust, SENSORS)).toEqual([...expected.trust]);
  }
}

describe("against a plain array", () => {
  test.each([
    ["empty", 0],
    ["with one row", 1],
    ["exactly full", 5],
    ["one past full", 6],
    ["after many laps", 5 * 40 + 3],
  ])("a ring of five %s holds the newest rows, oldest first", (_, pushed) => {
    const ring = ringOf(5);
    for (let n = 0; n < pushed; n++) push(ring, n);
    const held = Math.min(5, pushed);
    const rows = ring.createRows(5);
    expect(ring.total).toBe(pushed);
    expect(ring.oldest).toBe(pushed - held);
    expect(ring.read(ring.oldest, 5, rows)).toBe(held);
    expectRows(rows, held, pushed - held);
  });

  test("any order of pushing, reading and searching gives what the array gives", () => {
    const operation = fc.oneof(
      fc.record({ kind: fc.constant("push" as const), count: fc.integer({ min: 1, max: 9 }) }),
      fc.record({
        kind: fc.constant("read" as const),
        back: fc.integer({ min: -2, max: 12 }),
        count: fc.nat(9),
      }),
      fc.record({ kind: fc.constant("search" as const), back: fc.double({ min: -2, max: 12, noNaN: true }) }),
    );
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 8 }),
        fc.array(operation, { maxLength: 40 }),
        (capacity, steps) => {
          const ring = ringOf(capacity);
          const rows = ring.createRows(6);
          let total = 0;
          for (const step of steps) {
            const oldest = Math.max(0, total - capacity);
            if (step.kind === "push") {
              for (let i = 0; i < step.count; i++) push(ring, total++);
            } else if (step.kind === "read") {
              const from = total - step.back;
              const held = from >= oldest && from < total;
              const expected = held ? Math.min(step.count, total - from, 6) : 0;
              expect(ring.read(from, step.count, rows)).toBe(expected);
              expectRows(rows, expected, from);
            } else {
              const timeS = total - step.back;
              const before = Array.from({ length: total - oldest }, (_, i) => oldest + i).filter(
                (n) => timeOf(n) <= timeS,
              );
              expect(ring.indexAtOrBefore(timeS)).toBe(before.at(-1) ?? -1);
            }
          }
        },
      ),
      { seed: 20261201, numRuns: 300 },
    );
  });
});

test("a reader that fell behind sees that it was lapped", () => {
  const ring = ringOf(4);
  const rows = ring.createRows(4);
  push(ring, 0);
  let next = ring.read(0, 4, rows);
  for (let n = 1; n < 7; n++) push(ring, n);
  expect(ring.read(next, 4, rows)).toBe(0);
  expect(next).toBeLessThan(ring.oldest);
  next = ring.oldest;
  expect(ring.read(next, 4, rows)).toBe(4);
});

describe("memory", () => {
  test("holds the span asked for where the budget allows", () => {
    const ring = new TrialRing({ sensorCount: 8, pointCount: 41, rateHz: 200, seconds: 600 });
    expect(ring.capacity).toBe(120_000);
    expect(ring.secondsHeld).toBe(600);
  });

  test("is cut to the budget, and says what fits", () => {
    const options = { sensorCount: 8, pointCount: 41, rateHz: 200, seconds: 600, budgetBytes: 1_000_000 };
    const ring = new TrialRing(options);
    // A row: 8 + 4 * (8 * 13 + 41 * 3) + 3 * 8 = 940 bytes; 1 000 000 / 940 = 1063.8.
    expect(ring.capacity).toBe(1063);
    expect(ring.byteLength).toBe(1063 * 940);
    expect(ring.secondsHeld).toBe(1063 / 200);
  });

  test.each([{ sensorCount: 0 }, { rateHz: Number.NaN }, { seconds: 0 }, { budgetBytes: 100 }])(
    "%j is refused",
    (wrong) => {
      const options = { sensorCount: 2, pointCount: 3, rateHz: 10, seconds: 1, ...wrong };
      expect(() => new TrialRing(options)).toThrow(/MISUSE/);
    },
  );
});
