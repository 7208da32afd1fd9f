import { expect, test } from "vitest";
import { GAITS } from "../../bridge/numeric/gaits.ts";
import { SwimmingBody } from "../../bridge/placement/swimming-body.ts";

const PHASES = [0, 0.7, 2.1, 4.4];
const bodies = Object.entries(GAITS).flatMap(([name, gait]) =>
  PHASES.map((phase) => [name, phase, new SwimmingBody(gait, phase)] as const),
);

test.each(bodies)("a %s body at phase %d has a length of 1, evenly counted by station", (_, __, body) => {
  const points = Array.from({ length: 1001 }, (_, i) => body.position(i / 1000));
  const steps = points.slice(1).map(({ x, y }, i) => Math.hypot(x - points[i].x, y - points[i].y));
  // Chords of 1/1000 are shorter than their arcs by (curvature / 1000)² / 24: below 1e-5 for curvatures up to 10.
  expect(steps.reduce((sum, step) => sum + step, 0)).toBeCloseTo(1, 5);
  // Places are off by less than 1e-5 each (see the file): so are steps of 1e-3, by 2e-5 at most.
  for (const step of steps) expect(Math.abs(step - 1e-3)).toBeLessThan(2e-5);
});

test.each(bodies)("a %s body at phase %d points along its line: nose forward, tail behind", (_, __, body) => {
  expect(body.position(0).x).toBeCloseTo(0, 12);
  expect(body.position(0).y).toBeCloseTo(0, 12);
  expect(body.position(1).x).toBeLessThan(-0.8);
  const h = 0.004; // places off by 1e-5 turn a chord of 8e-3 by up to 2.5e-3 rad
  for (const station of [0.1, 0.35, 0.6, 0.85]) {
    const [ahead, behind] = [body.position(station - h), body.position(station + h)];
    const chord = Math.atan2(ahead.y - behind.y, ahead.x - behind.x);
    expect(Math.abs(body.angle(station) - chord)).toBeLessThan(2.5e-3);
  }
});

test("the tail's excursion from the travel axis is the envelope's, scaled to the body's own length", () => {
  const phase = Math.PI / 2 + (2 * Math.PI) / GAITS.carangiform.wavelength;
  const body = new SwimmingBody(GAITS.carangiform, phase);
  const tip = body.position(1);
  // The nose lies at a distance of 1 along the travel axis before scaling, 1 / length after.
  const length = -1 / tip.x;
  expect(length).toBeGreaterThan(1);
  expect((tip.y + body.noseLateral) * length).toBeCloseTo(GAITS.carangiform.amplitude(1), 10);
});
