import { describe, expect, it } from "vitest";
import { HealthBench } from "../support/health-bench.ts";
import { CRUISE, REST } from "../support/synthetic-sweeps.ts";

/** Runs with sensor `i` turned by `angle` about its own x axis (roll), as fusion would have it. */
function turned(bench: HealthBench, i: number, angle: number, seconds: number): HealthBench {
  const q = bench.rig.orientations;
  return bench.run(seconds, () => {
    const [w, x, y, z] = q.subarray(4 * i, 4 * i + 4) as unknown as [number, number, number, number];
    const c = Math.cos(angle / 2);
    const s = Math.sin(angle / 2);
    q.set([w * c - x * s, x * c + w * s, y * c + z * s, z * c - y * s], 4 * i);
  });
}

const KIND = "mounting changed";
const of = (bench: HealthBench) => bench.raised.filter((flag) => flag.startsWith(KIND));

describe.each([
  ["at rest", REST],
  ["swimming", CRUISE],
] as const)("a sensor that turns in its mounting %s", (_, motion) => {
  it("is told within a second, with the angle, while it stays so, and ends when it is put back", () => {
    const bench = turned(new HealthBench({ motion }).run(10), 3, 0.5, 1);
    expect(of(bench)).toEqual(["mounting changed@3"]);
    expect(bench.flags.find(({ kind }) => kind === KIND)!.detail).toMatch(/^turned by up to [23]\d°/);
    turned(bench, 3, 0.5, 60);
    expect(bench.book.find(KIND, 3)).not.toBeNull();
    bench.run(3);
    expect(bench.book.find(KIND, 3)).toBeNull();
  });

  it("by ten degrees is not told", () => {
    expect(of(turned(new HealthBench({ motion }).run(10), 3, 0.17, 20))).toEqual([]);
  });

  it("from the start is the rig file's matter, not a change", () => {
    expect(of(turned(new HealthBench({ motion }), 3, 0.5, 20))).toEqual([]);
  });
});

it("a body that rolls as a whole has no loose sensor", () => {
  const bench = new HealthBench({ motion: REST }).run(10);
  const q = bench.rig.orientations;
  bench.run(5, () => {
    for (let i = 0; i < 6; i++) q.set([Math.cos(0.4), Math.sin(0.4), 0, 0], 4 * i);
  });
  expect(of(bench)).toEqual([]);
});

it("the first and the last sensor are told as well", () => {
  for (const i of [0, 5]) {
    expect(of(turned(new HealthBench({ motion: CRUISE }).run(10), i, -0.6, 1.2))).toEqual([
      `mounting changed@${i}`,
    ]);
  }
});

it("two sensors cannot tell which of them has turned", () => {
  expect(of(turned(new HealthBench({ sensorCount: 2 }).run(10), 1, 0.6, 5))).toEqual([]);
});
