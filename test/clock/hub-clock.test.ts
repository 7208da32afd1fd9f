import { beforeEach, describe, expect, it } from "vitest";
import { Admission, HubClock } from "../../bridge/clock/hub-clock.ts";
import { createSweep } from "../../bridge/sweep.ts";

const RATE_HZ = 200;
const INTERVAL_US = 5000;
const EPOCH_MS = 1_700_000_000_000;
const { NEXT, DUPLICATE, LATE, RESTARTED } = Admission;

const sweep = createSweep(1);
let clock = new HubClock({ rateHz: RATE_HZ });
beforeEach(() => {
  clock = new HubClock({ rateHz: RATE_HZ });
});

/** A sweep as the hub sent it; `hostS` is when it arrived. Counters wrap as the hub's do. */
function send({ sequence, tickUs, hostS }: { sequence?: number; tickUs?: number; hostS: number }): Admission {
  sweep.sequence = sequence === undefined ? -1 : sequence % 2 ** 16;
  sweep.tickUs = tickUs === undefined ? -1 : tickUs % 2 ** 32;
  sweep.hostTimeMs = EPOCH_MS + hostS * 1000;
  return clock.admit(sweep);
}

/** The n-th sweep of a hub that never errs, arriving at once. */
function nth(n: number, startUs = 0): Parameters<typeof send>[0] {
  return { sequence: n, tickUs: startUs + n * INTERVAL_US, hostS: (n * INTERVAL_US) / 1e6 };
}

describe("tick and sequence", () => {
  it("starts at zero with the nominal interval as its step", () => {
    expect(send(nth(7))).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 0, stepS: 0.005, lostBefore: 0 });
  });

  it("gives true time steps where the tick jitters, and no loss", () => {
    send({ sequence: 0, tickUs: 0, hostS: 0 });
    send({ sequence: 1, tickUs: 8123, hostS: 0 });
    expect(sweep).toMatchObject({ timeS: 0.008123, stepS: 0.008123, lostBefore: 0 });
    send({ sequence: 2, tickUs: 10_001, hostS: 0 });
    expect(sweep).toMatchObject({ timeS: 0.010001, stepS: 0.001878, lostBefore: 0 });
  });

  it("runs on when tick and sequence wrap, exactly at 2^32 and 2^16", () => {
    send({ sequence: 65_535, tickUs: 2 ** 32 - INTERVAL_US, hostS: 0 });
    expect(send({ sequence: 0, tickUs: 0, hostS: 0 })).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 0.005, stepS: 0.005, lostBefore: 0 });
    expect(send({ sequence: 1, tickUs: INTERVAL_US, hostS: 0 })).toBe(NEXT);
    expect(sweep.timeS).toBe(0.01);
    expect(clock.counters.tickWraps).toBe(1);
  });

  it("counts lost sweeps by the sequence, also when the tick wraps inside the gap", () => {
    const startUs = 2 ** 32 - 3 * INTERVAL_US;
    send(nth(0, startUs));
    // Stamped at once with the sweep before: the sequence alone accounts for the 12 s.
    expect(send({ ...nth(2400, startUs), hostS: 0 })).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 12, stepS: 12, lostBefore: 2399 });
  });

  it("counts 100,000 lost sweeps, more than the sequence can tell", () => {
    send(nth(0));
    expect(send(nth(100_001))).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 500.005, lostBefore: 100_000 });
    expect(clock.counters).toMatchObject({ sweeps: 2, lost: 100_000, restarts: 0 });
  });

  it("counts the loss across a gap longer than the tick's whole range, by the arrivals", () => {
    send(nth(0));
    const n = 2 * 71.6 * 60 * RATE_HZ;
    expect(send(nth(n))).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: n / RATE_HZ, lostBefore: n - 1 });
  });

  it("drops a sweep that comes twice", () => {
    send(nth(0));
    send(nth(1));
    expect(send(nth(1))).toBe(DUPLICATE);
    expect(send(nth(2))).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 0.01, stepS: 0.005, lostBefore: 0 });
    expect(clock.counters).toMatchObject({ sweeps: 3, duplicates: 1, lost: 0 });
  });

  it("drops a sweep that comes late, also across a wrap", () => {
    const startUs = 2 ** 32 - INTERVAL_US;
    send(nth(0, startUs));
    send(nth(2, startUs));
    expect(sweep.lostBefore).toBe(1);
    expect(send(nth(1, startUs))).toBe(LATE);
    expect(send(nth(0, startUs))).toBe(LATE);
    expect(send(nth(3, startUs))).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 0.015, stepS: 0.005, lostBefore: 0 });
    expect(clock.counters.late).toBe(2);
  });

  it("leaves a dropped sweep's time alone", () => {
    send(nth(0));
    send(nth(1));
    sweep.timeS = -1;
    sweep.lostBefore = -1;
    send(nth(1));
    expect(sweep).toMatchObject({ timeS: -1, lostBefore: -1 });
  });

  it("keeps time strictly increasing where the tick is coarser than the sweeps", () => {
    send({ sequence: 0, tickUs: 0, hostS: 0 });
    expect(send({ sequence: 1, tickUs: 0, hostS: 0 })).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 1e-6, lostBefore: 0 });
    send({ sequence: 2, tickUs: 10_000, hostS: 0 });
    expect(sweep.timeS).toBe(0.01);
  });

  it("reports no loss when the hub runs at twice or half the rate in the rig file", () => {
    for (const intervalUs of [2500, 10_000]) {
      clock = new HubClock({ rateHz: RATE_HZ });
      for (let n = 0; n < 5; n++) expect(send({ sequence: n, tickUs: n * intervalUs, hostS: 0 })).toBe(NEXT);
      expect(sweep.timeS).toBe((4 * intervalUs) / 1e6);
      expect(clock.counters.lost).toBe(0);
    }
  });

  it("takes a pause of the hub, in which it counted no sweeps, as it is when the arrivals show it", () => {
    send({ sequence: 0, tickUs: 0, hostS: 0 });
    expect(send({ sequence: 1, tickUs: 5e6, hostS: 5 })).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 5, lostBefore: 0 });
  });
});

describe("damage", () => {
  it("trusts the sequence when a tick jumps ahead by hours, and the tick again after it", () => {
    for (const n of [0, 1, 2]) send(nth(n));
    expect(send({ ...nth(3), tickUs: 3.5e9 })).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 0.015, lostBefore: 0 });
    expect(send(nth(6))).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 0.03, lostBefore: 2 });
    expect(clock.counters).toMatchObject({ damagedTicks: 1, restarts: 0 });
  });

  it("takes over a tick that the hub has set, and time goes on", () => {
    for (const n of [0, 1]) send(nth(n));
    for (const n of [2, 3, 4]) expect(send({ ...nth(n), tickUs: 2e9 + n * INTERVAL_US })).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 0.02, lostBefore: 0 });
    expect(clock.counters.damagedTicks).toBe(1);
    expect(clock.timeOf(2e9 + 10 * INTERVAL_US)).toBeCloseTo(0.05, 12);
  });

  it("trusts the tick when a sequence number is damaged", () => {
    for (const n of [0, 1]) send(nth(n));
    expect(send({ ...nth(2), sequence: 40_000 })).toBe(NEXT);
    expect(sweep.lostBefore).toBe(0);
    expect(send(nth(3))).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 0.015, lostBefore: 0 });
    expect(clock.counters.lost).toBe(0);
  });

  it("counts loss by the tick when the hub's sequence stands still", () => {
    send({ sequence: 9, tickUs: 0, hostS: 0 });
    expect(send({ sequence: 9, tickUs: 4 * INTERVAL_US, hostS: 0.02 })).toBe(NEXT);
    expect(sweep.lostBefore).toBe(3);
  });
});

describe("restart of the hub", () => {
  it("lets time go on across the gap between the arrivals, after minutes as after an hour", () => {
    for (const n of [20_000, 60_000 + 65_536 * 11]) {
      clock = new HubClock({ rateHz: RATE_HZ });
      send(nth(n));
      const hostS = n / RATE_HZ + 3;
      expect(send({ sequence: 2, tickUs: 410_000, hostS })).toBe(RESTARTED);
      expect(sweep.timeS).toBeCloseTo(3, 6); // the arrival stamp is a double near 1.7e12 ms, good to 0.0003 ms
      expect(sweep.lostBefore).toBe(599);
      expect(send({ sequence: 3, tickUs: 415_000, hostS: hostS + 0.005 })).toBe(NEXT);
      expect(sweep).toMatchObject({ stepS: 0.005, lostBefore: 0 });
      expect(clock.counters.restarts).toBe(1);
    }
  });

  it("takes at least one interval when the arrivals show no gap, or the host clock was set back", () => {
    for (const hostS of [100, 40]) {
      clock = new HubClock({ rateHz: RATE_HZ });
      send(nth(20_000));
      expect(send({ sequence: 0, tickUs: 0, hostS })).toBe(RESTARTED);
      expect(sweep).toMatchObject({ timeS: 0.005, stepS: 0.005, lostBefore: 0 });
    }
  });
});

describe("tick only", () => {
  const tick = (tickUs: number, hostS = tickUs / 1e6) => send({ tickUs, hostS });

  it("counts lost sweeps from the step, jitter below half an interval aside", () => {
    tick(0);
    tick(7400);
    expect(sweep.lostBefore).toBe(0);
    tick(7400 + 4 * INTERVAL_US + 2400);
    expect(sweep.lostBefore).toBe(3);
  });

  it("knows duplicates, late sweeps and restarts by the tick alone", () => {
    tick(100e6);
    expect(tick(100e6)).toBe(DUPLICATE);
    expect(tick(100e6 - INTERVAL_US)).toBe(LATE);
    expect(tick(200_000, 102)).toBe(RESTARTED);
    expect(sweep).toMatchObject({ timeS: 2, lostBefore: 399 });
  });

  it("believes a long gap that the arrivals confirm, across a wrap", () => {
    send({ tickUs: 2 ** 32 - 1e6, hostS: 0 });
    expect(send({ tickUs: 599e6, hostS: 600.3 })).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 600, lostBefore: 119_999 });
  });

  it("passes over a single tick that is far ahead", () => {
    tick(0);
    tick(INTERVAL_US);
    expect(tick(3e9, 0.01)).toBe(NEXT);
    expect(sweep.timeS).toBe(0.01);
    expect(tick(3 * INTERVAL_US)).toBe(NEXT);
    expect(sweep.timeS).toBe(0.015);
    expect(clock.counters.damagedTicks).toBe(1);
  });
});

describe("sequence only", () => {
  const count = (sequence: number, hostS = sequence / RATE_HZ) => send({ sequence, hostS });

  it("gives count / rate as time, and the loss", () => {
    count(65_530);
    count(65_531);
    expect(sweep).toMatchObject({ timeS: 0.005, stepS: 0.005, lostBefore: 0 });
    expect(count(65_536)).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 0.03, lostBefore: 4 });
    expect(count(65_536)).toBe(DUPLICATE);
    expect(count(65_535)).toBe(LATE);
  });

  it("counts whole rounds by the arrivals", () => {
    count(0);
    expect(count(100_001)).toBe(NEXT);
    expect(sweep).toMatchObject({ timeS: 100_001 / RATE_HZ, lostBefore: 100_000 });
  });

  it("takes a jump that the arrivals do not bear out as a restart", () => {
    for (const before of [30_000, 60_000]) {
      clock = new HubClock({ rateHz: RATE_HZ });
      count(before, 0);
      expect(count(1, 2)).toBe(RESTARTED);
      expect(sweep).toMatchObject({ timeS: 2, lostBefore: 399 });
    }
  });
});

it("lets every sweep follow where there is neither tick nor sequence", () => {
  const tenth = Array.from({ length: 11 }, () => send({ hostS: 0 }) === NEXT && sweep.timeS)[10];
  expect(tenth).toBe(0.05);
  expect(clock.timeOf(123)).toBe(0.05);
});

describe("times of other packets", () => {
  it("lie before and after the newest sweep, across a wrap in either direction", () => {
    const startUs = 2 ** 32 - INTERVAL_US;
    send(nth(0, startUs));
    expect(clock.timeOf(INTERVAL_US)).toBe(0.01);
    send(nth(1, startUs));
    expect(clock.timeOf(startUs)).toBe(0);
    expect(clock.timeOf(2500)).toBe(0.0075);
  });

  it("stay right after a restart", () => {
    send(nth(20_000));
    send({ sequence: 0, tickUs: 1000, hostS: 102 });
    expect(clock.timeOf(6000)).toBeCloseTo(2.005, 9);
  });
});
