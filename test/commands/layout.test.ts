/** bendwatch layout as a user runs it. */
import { existsSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { expect, test } from "vitest";
import { bendwatch } from "../support/bridge-process.ts";
import { temporaryFolder } from "../support/folders.ts";

test("says what the rig's places, even ones and the best ones give, how many it takes, and draws it", async () => {
  const picture = join(temporaryFolder(), "foil.svg");
  const { code, out, err } = await bendwatch(
    "layout",
    ...["--rig", "ribbon-foil", "--sensors", "4", "--error-percent", "1", "--picture", picture],
  );
  expect(err).toBe("");
  expect(code).toBe(0);
  expect(out).toMatch(
    /^Ribbon foil, bench 2: 640 mm, carangiform wave of 0\.95 body lengths, \w+ between sensors$/m,
  );
  expect(out).toMatch(/^ {2}6 as in the rig file( +\d+\.\d\d){3} +\d+\.\d +[+-]\d+\.\d$/m);
  expect(out).toMatch(/^ {2}4 evenly /m);
  expect(out).toMatch(/^ {2}4 at best places /m);
  expect(out).toMatch(/^For 1\.00 % L: \d at the best places, \d evenly$/m);
  expect(readFileSync(picture, "utf8")).toMatch(/^<svg [\s\S]*<\/svg>\n$/);
});

test("the same question gets the same answer, as JSON too, with the rig's own places where it has that many", async () => {
  const args = ["layout", "--rig", "tethered-animal", "--wave", "anguilliform", "--json"];
  const [first, second] = await Promise.all([bendwatch(...args), bendwatch(...args)]);
  expect(second.out).toBe(first.out);
  const { present, best, byCount } = JSON.parse(first.out);
  expect(present.stations).toEqual([0.05, 0.2, 0.35, 0.5, 0.64, 0.78, 0.91]);
  expect(best.stations).toHaveLength(7);
  expect(best.error.local.total).toHaveLength(41);
  expect(best.error.total).toBeLessThanOrEqual(present.error.total);
  expect(byCount[6].best.error.total).toBe(best.error.total);
});

test("an envelope of one's own: the carangiform one by its coefficients gives the carangiform answer", async () => {
  const rig = ["layout", "--rig", "ribbon-foil", "--sensors", "3", "--range-percent", "10,90", "--json"];
  const [named, given] = await Promise.all([
    bendwatch(...rig),
    bendwatch(...rig, "--envelope", "0.02,-0.08,0.16", "--wavelength", "0.95"),
  ]);
  const [ofNamed, ofGiven] = [named, given].map(({ out }) => JSON.parse(out));
  expect(ofGiven.wave).toBe("given wave of 0.95 body lengths");
  // The same polynomial summed in another order: rounding.
  expect(ofGiven.even.error.total).toBeCloseTo(ofNamed.even.error.total, 12);
});

test.each([
  [["--sensors", "40"], /--sensors: found 40; expected 1 to 31/],
  [["--sensors", "0"], /--sensors: found 0/],
  [["--range-percent", "90,10"], /--range-percent: found 90,10; expected two places/],
  [["--noise-deg", "0.7"], /--noise-deg: found 0\.7; expected two numbers/],
  [["--noise-deg", "0.7,wide"], /expected numbers, with commas between/],
  [["--envelope", "0"], /--envelope: found an amplitude of 0\.00 body lengths/],
  [["--envelope", "20,-80,160"], /--envelope: found an amplitude of 100 body lengths/],
  [["--wavelength", "0.1"], /--wavelength: found 0\.1/],
  [["--picture", join("no-such-folder", "a.svg")], /^FILE_UNWRITABLE\n {2}no-such-folder/],
])("%j is refused with a reason, exit code 2", async (args, reason) => {
  const { code, out, err } = await bendwatch("layout", "--rig", "ribbon-foil", ...args);
  expect(code).toBe(2);
  expect(err).toMatch(reason);
  expect(out).toBe("");
  expect(existsSync("no-such-folder")).toBe(false);
});
