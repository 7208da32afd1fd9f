import fc from "fast-check";
import { expect, test } from "vitest";
import { BendwatchError } from "../../bridge/errors.ts";
import { FAULT_KINDS, parseFault } from "../../bridge/rehearsal/faults.ts";

const NAMES = ["S1", "S2", "mid.2"];

test("every kind parses in its form", () => {
  for (const [kind, { of }] of Object.entries(FAULT_KINDS)) {
    const target = { rig: "", sensor: ":S2", axis: ":S2.gy" }[of];
    const fault = parseFault(`${kind}${target}@20+8.5`, NAMES);
    expect(fault).toEqual({
      kind,
      sensor: of === "rig" ? -1 : 1,
      axis: of === "axis" ? 1 : -1,
      startS: 20,
      endS: 28.5,
    });
  }
});

test("a sensor's name may hold a dot", () => {
  expect(parseFault("magnet:mid.2@1+1", NAMES).sensor).toBe(2);
  expect(parseFault("stuck:mid.2.mz@1+1", NAMES)).toMatchObject({ sensor: 2, axis: 8 });
});

test.each([
  ["magnet", /found "magnet"; expected kind@start\+duration/],
  ["magnet:S1@5", /expected kind@start\+duration/],
  ["magnet:S1@-5+2", /expected kind@start\+duration/],
  ["gremlin@5+2", /found kind "gremlin"; expected one of magnet, /],
  ["constructor@5+2", /found kind "constructor"/],
  ["magnet@5+2", /found no sensor; expected one of S1, S2, mid\.2/],
  ["magnet:S9@5+2", /found sensor "S9"/],
  ["loss:S1@5+2", /found "S1"; expected no sensor/],
  ["stuck:S1@5+2", /found no axis; expected \.axis/],
  ["stuck:S1.qq@5+2", /found axis "qq"/],
  ["burst@5+0", /found a duration of 0 s/],
])("%s is refused with what was found and expected", (text, message) => {
  expect(() => parseFault(text, NAMES)).toThrow(message);
  expect(() => parseFault(text, NAMES)).toThrow(/COMMAND_INVALID/);
});

test("no text makes it fail in any other way", () => {
  const part = fc.constantFrom("magnet", "stuck", "loss", ":", "S1", ".gy", "@", "+", "1", "2.5", "x");
  fc.assert(
    fc.property(
      fc.oneof(
        fc.string(),
        fc.array(part, { maxLength: 8 }).map((p) => p.join("")),
      ),
      (text) => {
        try {
          const { startS, endS } = parseFault(text, NAMES);
          expect(endS).toBeGreaterThan(startS);
        } catch (error) {
          expect(error).toBeInstanceOf(BendwatchError);
        }
      },
    ),
    { seed: 3, numRuns: 2000 },
  );
});
