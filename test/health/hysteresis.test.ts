import { describe, expect, it } from "vitest";
import { Hysteresis, Turn } from "../../bridge/health/hysteresis.ts";

describe("Hysteresis", () => {
  it("turns on after an unbroken onset, counted from its first bad reading", () => {
    const state = new Hysteresis(1, 0.3, 1);
    expect(state.step(0, 1.0, true)).toBe(Turn.NONE);
    expect(state.step(0, 1.2, false)).toBe(Turn.NONE);
    expect(state.step(0, 1.3, true)).toBe(Turn.NONE);
    expect(state.step(0, 1.5, true)).toBe(Turn.NONE);
    expect(state.step(0, 1.6, true)).toBe(Turn.REPORT);
    expect(state.sinceS[0]).toBe(1.3);
  });

  it("turns off after a full quiet time; what is neither bad nor calm keeps it on", () => {
    const state = new Hysteresis(1, 0, 1);
    state.step(0, 1, true);
    expect(state.step(0, 1.9, false, false)).not.toBe(Turn.END);
    expect(state.step(0, 2.8, false)).not.toBe(Turn.END);
    expect(state.step(0, 2.9, false)).toBe(Turn.END);
    expect(state.lastBadS[0]).toBe(1.9);
    expect(state.on[0]).toBe(0);
  });

  it("asks for a fresh detail a quarter second after the onset and then every second", () => {
    const state = new Hysteresis(1, 0, 1);
    const reports: number[] = [];
    for (let tick = 0; tick <= 250; tick++) {
      if (state.step(0, tick / 100, true) === Turn.REPORT) reports.push(tick);
    }
    expect(reports).toEqual([0, 25, 125, 225]);
  });

  it("keeps the worst of an episode, the onset included, and forgets it with the next", () => {
    const state = new Hysteresis(1, 0.2, 0.5);
    state.step(0, 1.0, true, false, 9);
    state.step(0, 1.1, true, false, 3);
    state.step(0, 1.2, true, false, 4);
    expect(state.worst[0]).toBe(9);
    state.step(0, 1.7, false, true, 0);
    state.step(0, 2.0, true, false, 2);
    expect(state.worst[0]).toBe(2);
  });

  it("keeps rows apart", () => {
    const state = new Hysteresis(2, 0, 1);
    state.step(1, 1, true);
    expect([...state.on]).toEqual([0, 1]);
  });
});
