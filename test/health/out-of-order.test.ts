import { describe, expect, it } from "vitest";
import { HealthBench } from "../support/health-bench.ts";

describe.each([
  ["duplicate", "duplicate sweeps@-1"],
  ["late", "late sweeps@-1"],
] as const)("sweeps that come %s", (what, flag) => {
  it("are told when two in a hundred are, and end", () => {
    const bench = new HealthBench().run(5);
    bench.health.sweepDropped(what);
    bench.run(0.2);
    expect(bench.raised).toEqual([]);
    bench.health.sweepDropped(what);
    bench.run(0.01);
    expect(bench.raised).toEqual([flag]);
    expect(bench.flags[0]!.detail).toBe("up to 2 % of sweeps in a second");
    bench.run(2.2);
    expect(bench.openNow).toEqual([]);
  });

  it("one every second is no flag", () => {
    const bench = new HealthBench();
    for (let k = 0; k < 20; k++) {
      bench.run(1.1);
      bench.health.sweepDropped(what);
    }
    expect(bench.raised).toEqual([]);
  });
});
