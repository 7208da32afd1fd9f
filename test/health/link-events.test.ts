import { describe, expect, it } from "vitest";
import { CONDITION, type Sweep } from "../../bridge/sweep.ts";
import { HealthBench } from "../support/health-bench.ts";

describe("a silent link", () => {
  it("is an alarm until the first good sweep, and the sweeps lost with it are no other flag", () => {
    const bench = new HealthBench().run(5);
    bench.health.linkSilent(true, 5.3);
    bench.health.linkSilent(true, 5.4);
    expect(bench.raised).toEqual(["link silent@-1"]);
    expect(bench.flags[0]).toMatchObject({ severity: "alarm", startS: 5.3 });
    expect(bench.health.sweepsPerS).toBe(0);
    bench.rig.lose(250);
    bench.run(3);
    expect(bench.openNow).toEqual([]);
    expect(bench.raised).toHaveLength(1);
    expect(bench.flags[0]).toMatchObject({ endS: 7.5, detail: "250 sweeps lost" });
    expect(bench.health.lostShare60).toBeGreaterThan(0.2);
  });

  it("ends as well when the joiner says so", () => {
    const bench = new HealthBench().run(1);
    bench.health.linkSilent(true, 1);
    bench.health.linkSilent(false, 2);
    expect(bench.flags[0]!.endS).toBe(2);
  });

  it("excuses only its own gap", () => {
    const bench = new HealthBench().run(5);
    bench.health.linkSilent(true, 5);
    bench.rig.lose(50);
    bench.run(0.5);
    bench.rig.lose(5);
    bench.run(0.5);
    expect(bench.raised).toEqual(["link silent@-1", "lost samples@-1"]);
  });
});

describe("a hub that starts anew", () => {
  it("is a caution shown for ten seconds, and its gap is no other flag", () => {
    const bench = new HealthBench().run(5);
    bench.health.hubRestarted(5.5);
    bench.rig.lose(50);
    bench.run(5);
    expect(bench.raised).toEqual(["hub restarted@-1"]);
    bench.run(6);
    expect(bench.flags[0]).toMatchObject({ severity: "caution", startS: 5.5, endS: 15.5 });
  });

  it("counts its restarts", () => {
    const bench = new HealthBench().run(5);
    bench.health.hubRestarted(5);
    bench.run(1);
    bench.health.hubRestarted(6);
    expect(bench.book.open[0]!.detail).toBe("2 times in this run");
  });
});

describe("corrupt packets", () => {
  it("are one flag with the sweeps they cost, and end", () => {
    const bench = new HealthBench().run(5);
    for (let k = 0; k < 10; k++) {
      bench.rig.lose(1);
      bench.health.corruption(1, bench.timeS + 0.02);
      bench.run(0.05);
    }
    expect(bench.raised).toEqual(["corrupt packets@-1"]);
    expect(bench.flags[0]!.severity).toBe("caution");
    bench.run(2.2);
    expect(bench.openNow).toEqual([]);
    expect(bench.health.lostShare60).toBeGreaterThan(0);
  });

  it("explain no more sweeps than they can have cost", () => {
    const bench = new HealthBench().run(5);
    bench.rig.lose(12);
    bench.health.corruption(1, bench.timeS + 0.13);
    bench.run(0.1);
    expect(bench.raised).toEqual(["corrupt packets@-1", "lost samples@-1"]);
    expect(bench.flags[1]!.detail).toBe("up to 10 % of sweeps lost in a second");
  });

  it("explain none a second later", () => {
    const bench = new HealthBench().run(5);
    bench.health.corruption(3, bench.timeS + 0.01);
    bench.run(1.2);
    bench.rig.lose(1);
    bench.run(0.1);
    expect(bench.raised).toEqual(["corrupt packets@-1", "lost samples@-1"]);
  });

  it("before the first sweep are the rest of a packet cut by opening the port", () => {
    const bench = new HealthBench();
    bench.health.corruption(1, 0);
    expect(bench.run(2).raised).toEqual([]);
  });
});

describe("sensor read errors", () => {
  const failing = (sensor: number, withReading: boolean) => (sweep: Sweep) => {
    sweep.readStatus[sensor] = 3;
    if (!withReading) sweep.present[sensor] = 0;
  };

  it.each([
    ["with", true],
    ["without", false],
  ])("are told at once, %s a reading, and are no lost samples as well", (_, withReading) => {
    const bench = new HealthBench().run(5).run(0.5, failing(2, withReading));
    expect(bench.raised).toEqual(["sensor read errors@2"]);
    expect(bench.flags[0]).toMatchObject({ severity: "alarm", startS: 5 });
    expect(bench.flags[0]!.detail).toMatch(/^up to \d\d % of readings failed in a second, status 3$/);
    expect(bench.rig.sweep.conditions[2]! & CONDITION.READ_FAILED).toBe(CONDITION.READ_FAILED);
    bench.run(2.2);
    expect(bench.openNow).toEqual([]);
    expect(bench.raised).toHaveLength(1);
  });

  it("of all sensors at once are told of each", () => {
    const bench = new HealthBench().run(5);
    bench.run(0.2, (sweep) => {
      sweep.readStatus.fill(1);
      sweep.present.fill(0);
    });
    expect(bench.raised).toEqual([0, 1, 2, 3, 4, 5].map((i) => `sensor read errors@${i}`));
  });
});
