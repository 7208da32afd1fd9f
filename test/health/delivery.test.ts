import { describe, expect, it } from "vitest";
import { CONDITION, HAS_MAG, type Sweep } from "../../bridge/sweep.ts";
import { HealthBench } from "../support/health-bench.ts";

/** Takes a sensor's reading out of a sweep whenever `when` says so of its tick. */
function absent(sensor: number, when: (tick: number) => boolean = () => true) {
  return (sweep: Sweep) => {
    if (when(Math.round(sweep.timeS * 100))) sweep.present[sensor] = 0;
  };
}

describe("lost sweeps", () => {
  it("are the rig's: marked on every sensor with the sweep that follows, flagged four later, ended", () => {
    const bench = new HealthBench().run(5);
    bench.rig.lose(3);
    bench.run(0.01);
    for (const conditions of bench.rig.sweep.conditions) expect(conditions).toBe(CONDITION.GAP);
    expect(bench.raised).toEqual([]);
    bench.run(0.04);
    expect(bench.raised).toEqual(["lost samples@-1"]);
    expect(bench.flags[0]).toMatchObject({
      severity: "notice",
      detail: "up to 3 % of sweeps lost in a second",
    });
    bench.run(2.2);
    expect(bench.openNow).toEqual([]);
    expect(bench.rig.sweep.conditions[0]).toBe(0);
  });

  it.each([
    [4, "notice"],
    [5, "caution"],
    [25, "alarm"],
  ])("%i of a hundred are a %s", (lost, severity) => {
    const bench = new HealthBench().run(5);
    bench.rig.lose(lost);
    expect(bench.run(0.05).flags[0]!.severity).toBe(severity);
  });

  it("get worse while open but never milder", () => {
    const bench = new HealthBench().run(5);
    for (let k = 0; k < 20; k++) {
      bench.rig.lose(k < 10 ? 4 : 1);
      bench.run(0.16);
    }
    expect(bench.flags).toHaveLength(1);
    expect(bench.flags[0]!.severity).toBe("caution");
  });

  it("one in a hundred, exactly the threshold, is told at 100 Hz; one in two hundred is not", () => {
    const slow = new HealthBench().run(5);
    slow.rig.lose(1);
    expect(slow.run(0.1).raised).toEqual(["lost samples@-1"]);
    const fast = new HealthBench({ rateHz: 200 }).run(5);
    fast.rig.lose(1);
    expect(fast.run(2).raised).toEqual([]);
    fast.rig.lose(1);
    fast.run(0.2);
    fast.rig.lose(1);
    expect(fast.run(0.1).raised).toEqual(["lost samples@-1"]);
  });

  it("and came late after all are no loss of the link", () => {
    const bench = new HealthBench().run(5);
    for (let k = 0; k < 20; k++) {
      bench.rig.lose(1);
      bench.run(0.02);
      bench.health.sweepDropped("late");
    }
    bench.run(1);
    expect(bench.raised).toEqual(["late sweeps@-1"]);
    expect(bench.health.lostShare60).toBeGreaterThan(0.02);
  });

  it("that keep coming are one flag", () => {
    const bench = new HealthBench().run(5);
    for (let k = 0; k < 30; k++) {
      bench.rig.lose(1);
      bench.run(0.9);
    }
    expect(bench.raised).toEqual(["lost samples@-1"]);
  });

  it("a sweep that comes without any sensor is lost as a whole", () => {
    const bench = new HealthBench().run(5).run(0.05, (sweep) => sweep.present.fill(0));
    expect(bench.raised).toEqual(["lost samples@-1"]);
  });
});

describe("readings missing from sweeps that came", () => {
  it("are their sensor's, told within half a second, marked, ended, and nobody else's", () => {
    const bench = new HealthBench().run(5).run(0.5, absent(4));
    expect(bench.raised).toEqual(["lost samples@4"]);
    expect(bench.rig.sweep.conditions[4]).toBe(CONDITION.GAP);
    expect(bench.rig.sweep.conditions[3]).toBe(0);
    expect(bench.flags[0]!.severity).toBe("alarm");
    bench.run(5, absent(4)).run(2.2);
    expect(bench.openNow).toEqual([]);
    expect(bench.raised).toHaveLength(1);
  });

  it("now and then are one flag as well", () => {
    const bench = new HealthBench().run(5).run(
      20,
      absent(1, (tick) => tick % 37 === 0),
    );
    expect(bench.raised).toEqual(["lost samples@1"]);
  });

  it("do not include a magnetometer's, which keeps its own time", () => {
    const bench = new HealthBench().run(20, (sweep) => {
      if (Math.round(sweep.timeS * 100) % 5 !== 0) sweep.present[0]! &= ~HAS_MAG;
    });
    expect(bench.raised).toEqual([]);
    expect(bench.health.delivered60[0]).toBe(1);
  });
});

describe("a sensor with a rate of its own", () => {
  /** In step with its own clock, not with the hub's. */
  const at = (rateHz: number, lost: (reading: number) => boolean = () => false) =>
    absent(2, (tick) => {
      const reading = Math.floor((tick * rateHz) / 100 + 0.3);
      const came = reading !== Math.floor(((tick - 1) * rateHz) / 100 + 0.3);
      return !came || lost(reading);
    });

  it.each([50, 40, 33, 25, 10])("of %i Hz owes no more than that", (rateHz) => {
    const bench = new HealthBench({ rates: { 2: rateHz } }).run(20, at(rateHz));
    expect(bench.raised).toEqual([]);
    expect(bench.health.delivered60[2]).toBe(1);
  });

  it.each([50, 40, 25])("of %i Hz is told for one reading in five, and counted", (rateHz) => {
    const bench = new HealthBench({ rates: { 2: rateHz } });
    bench.run(
      20,
      at(rateHz, (reading) => reading % 5 === 0),
    );
    expect(bench.raised).toEqual(["lost samples@2"]);
    // One reading more or less at either end of 500 or more.
    expect(bench.health.delivered60[2]).toBeCloseTo(0.8, 2);
  });
});

describe("shares over a minute", () => {
  it("count lost sweeps for every sensor and lost readings for their own", () => {
    const bench = new HealthBench().run(30);
    bench.rig.lose(300);
    bench.run(
      27,
      absent(0, (tick) => tick % 10 === 0),
    );
    // Of 6000 due: 300 sweeps for all, and a tenth of 2700 for the first.
    expect(bench.health.delivered60[1]).toBeCloseTo(1 - 300 / 6000, 3);
    expect(bench.health.delivered60[0]).toBeCloseTo(1 - 570 / 6000, 3);
    expect(bench.health.lostShare60).toBeCloseTo((5 * 300 + 570) / 36_000, 3);
  });

  it("forget a long gap evenly as it leaves the minute", () => {
    const bench = new HealthBench().run(5);
    bench.health.linkSilent(true, bench.timeS);
    bench.rig.lose(12_000);
    bench.run(30);
    // Thirty seconds of sweeps after thirty of silence; slices of a second.
    expect(bench.health.lostShare60).toBeCloseTo(0.5, 1);
    bench.run(31);
    expect(bench.health.lostShare60).toBe(0);
  });
});
