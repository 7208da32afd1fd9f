import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { mergeTables } from "../../../bridge/trial/import/merge.ts";
import type { TableRow } from "../../../bridge/trial/import/table.ts";

/** A table that holds nothing but times, reusing its row as a real one does. */
async function* tableOf(times: readonly number[]): AsyncGenerator<TableRow> {
  const none = { values: new Float64Array(0), present: new Uint8Array(0), held: new Uint8Array(0) };
  const row: TableRow = { timeUs: 0, ...none };
  for (const time of times) {
    row.timeUs = time;
    yield row;
  }
}

async function merge(tables: readonly (readonly number[])[], toleranceUs: number) {
  const sweeps: [number, ...(number | null)[]][] = [];
  for await (const { timeUs, rows } of mergeTables(tables.map(tableOf), toleranceUs)) {
    sweeps.push([timeUs, ...rows.map((row) => row?.timeUs ?? null)]);
  }
  return sweeps;
}

describe("merging", () => {
  test("rows within the tolerance are one sweep at the time of the earliest", async () => {
    expect(
      await merge(
        [
          [0, 10, 20],
          [3, 9, 24],
        ],
        3,
      ),
    ).toEqual([
      [0, 0, 3],
      [9, 10, 9],
      [20, 20, null],
      [24, null, 24],
    ]);
  });

  test("a table that starts late, ends early or misses rows leaves its place empty", async () => {
    expect(await merge([[0, 10, 20, 30], [10, 30], []], 3)).toEqual([
      [0, 0, null, null],
      [10, 10, 10, null],
      [20, 20, null, null],
      [30, 30, 30, null],
    ]);
  });

  test("one table's rows are never joined with each other", async () => {
    expect(await merge([[0, 1, 2]], 5)).toEqual([
      [0, 0],
      [1, 1],
      [2, 2],
    ]);
  });

  test("every row is used once, sweeps move forward, and no row is further from its sweep than the tolerance", async () => {
    const times = fc
      .uniqueArray(fc.integer({ min: 0, max: 300 }), { maxLength: 40 })
      .map((list) => list.sort((a, b) => a - b));
    await fc.assert(
      fc.asyncProperty(
        fc.array(times, { minLength: 1, maxLength: 4 }),
        fc.nat(20),
        async (tables, tolerance) => {
          const sweeps = await merge(tables, tolerance);
          tables.forEach((table, t) => {
            expect(sweeps.map((sweep) => sweep[t + 1]).filter((time) => time !== null)).toEqual(table);
          });
          sweeps.forEach(([time, ...rows], i) => {
            if (i > 0) expect(time).toBeGreaterThan(sweeps[i - 1]![0]);
            const used = rows.filter((row) => row !== null);
            expect(Math.min(...used)).toBe(time);
            expect(Math.max(...used) - time).toBeLessThanOrEqual(tolerance);
          });
        },
      ),
    );
  });
});
