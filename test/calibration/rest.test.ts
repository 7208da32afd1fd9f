import { expect, it } from "vitest";
import { RestBias } from "../../bridge/calibration/rest.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { attitude, Handled, place, UNIT } from "./handled.ts";

function rest(seed = 1) {
  const sensors = [place({}, 0), place({}, 1)];
  const procedure = new RestBias(sensors, [UNIT, UNIT], 100);
  return { procedure, handled: new Handled(sensors, procedure, { seed }) };
}

it("finds each bias to a few thousandths of a degree a second, and says how well", () => {
  const { procedure, handled } = rest();
  handled.hold(attitude(30, 5, -20), 22);
  expect(procedure.progress()).toEqual({ share: 1, text: "Done." });
  procedure.result().forEach((outcome, i) => {
    if (!outcome.ok) throw new Error(outcome.reason);
    const { gyroBiasDegPerS, sigmaDegPerS } = outcome.numbers;
    gyroBiasDegPerS.forEach((bias, k) => {
      expect(Math.abs(bias - handled.units[i]!.gyro.bias[k]! * DEG_PER_RAD)).toBeLessThan(4 * sigmaDegPerS);
    });
    expect(sigmaDegPerS).toBeLessThan(0.005);
  });
});

it("refuses what moved, and takes the longest stillness between movements", () => {
  const { procedure, handled } = rest(2);
  const sway = (timeS: number) => [0, 0, 0.1 * Math.sin(9 * timeS)];
  handled.turn(6, sway);
  expect(procedure.progress()).toEqual({
    share: 0,
    text: "Lay everything down and let go: something moves.",
  });
  handled.hold(attitude(0), 4).turn(3, sway);
  expect(procedure.result()[0]).toMatchObject({
    ok: false,
    reason: expect.stringMatching(/[34]\.[05] s at most/),
  });
  handled.hold(attitude(0), 12).turn(3, sway).hold(attitude(0), 3);
  const [first] = procedure.result();
  expect(first).toMatchObject({ ok: true });
  if (first!.ok) expect(first!.numbers.stillS).toBeGreaterThanOrEqual(11);
});

it("an even turn that could be a bias shows in the field", () => {
  const { procedure, handled } = rest(3);
  handled.turn(30, () => [0, 0, 0.8 / DEG_PER_RAD]);
  expect(procedure.result()[0]!.ok).toBe(false);
});

it("an even turn faster than any bias is motion", () => {
  const { procedure, handled } = rest(4);
  handled.field.fill(0);
  handled.turn(30, () => [0, 0, 4 / DEG_PER_RAD]);
  expect(procedure.result()[0]!.ok).toBe(false);
});
