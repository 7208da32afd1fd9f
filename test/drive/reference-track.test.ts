import { expect, test } from "vitest";
import { ReferenceTrack } from "../../bridge/drive/reference-track.ts";

test("between uneven readings the drive's motion is known one reading later", () => {
  const motion = (timeS: number) => Math.sin(2 * Math.PI * timeS);
  const track = new ReferenceTrack();
  const known: number[] = [];
  const times = Array.from({ length: 60 }, (_, i) => 0.02 * i + 0.004 * Math.sin(7 * i));
  for (const timeS of times) {
    if (!track.add(timeS, motion(timeS), 0.1 * motion(timeS))) continue;
    for (const share of [0.25, 0.5, 1]) {
      const at = track.fromS + share * (track.toS - track.fromS);
      track.at(at);
      known.push(at);
      // Error of a cubic: (24 ms)^4 / 24 times the fourth derivative of a 1 Hz tone, at most.
      expect(Math.abs(track.yaw - motion(at))).toBeLessThan(4e-5);
      expect(Math.abs(track.sway - 0.1 * motion(at))).toBeLessThan(4e-6);
    }
  }
  expect(known).toHaveLength(3 * 57);
  expect(known.at(-1)).toBe(times[58]);
});

test("readings that are not later than the last are counted and left out", () => {
  const track = new ReferenceTrack();
  for (const timeS of [0, 0.01, 0.02, 0.03]) track.add(timeS, 1, 1);
  expect(track.add(0.03, 9, 9)).toBe(false);
  expect(track.add(0.01, 9, 9)).toBe(false);
  expect(track.outOfOrder).toBe(2);
  expect(track.add(0.04, 1, 1)).toBe(true);
  track.at(0.025);
  expect(track.yaw).toBeCloseTo(1, 12);
});

test("three readings lost in a row make a hole, two do not", () => {
  const holes = (lost: number) => {
    const track = new ReferenceTrack();
    const found: boolean[] = [];
    for (let i = 0; i < 60; i++)
      if (i < 30 || i >= 30 + lost) found.push(track.add(i / 100, 0, 0) && track.hole);
    return found.filter(Boolean).length;
  };
  expect([holes(0), holes(2), holes(3)]).toEqual([0, 0, 1]);
});

test("a drive without sway gives none", () => {
  const track = new ReferenceTrack();
  for (const timeS of [0, 0.01, 0.02, 0.03]) track.add(timeS, 0.5, Number.NaN);
  track.at(0.015);
  expect(track.yaw).toBeCloseTo(0.5, 12);
  expect(track.sway).toBeNaN();
});
