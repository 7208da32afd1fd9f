import { readFileSync } from "node:fs";
import { join } from "node:path";
import { expect, test } from "vitest";
import { DAYLIGHT } from "../../bridge/drawing/daylight.ts";
import { packageRoot } from "../../bridge/paths.ts";
import type { PlanSubject } from "../../bridge/placement/describe.ts";
import { drawPlan } from "../../bridge/placement/picture.ts";
import { planPlacement } from "../../bridge/placement/plan.ts";
import { RANGE, swimmerWith } from "./models.ts";

const swimmer = swimmerWith("anguilliform");
const present = [0.1, 0.5, 0.9];
const plan = planPlacement({ ...swimmer, range: { ...RANGE, spacing: 0.15 }, present, count: 4 });
const subject: PlanSubject = {
  rigName: 'Bench <2> & "tank"',
  lengthMm: 1200,
  wave: "anguilliform wave of 0.642 body lengths",
  interpolation: "slerp",
  noiseDeg: { inclination: 0.7, heading: 1 },
  range: { ...RANGE, spacing: 0.15 },
  wantedError: null,
};
const svg = drawPlan({ ...subject, body: { kind: "dummy" }, gait: swimmer.gait }, plan);

const count = (pattern: RegExp) => svg.match(pattern)?.length ?? 0;

test("every element is closed by its own name, and names from outside are text", () => {
  const open: string[] = [];
  for (const [, closing, name, selfClosing] of svg.matchAll(/<(\/?)([a-zA-Z]+)[^>]*?(\/?)>/g)) {
    if (closing) expect(open.pop()).toBe(name);
    else if (!selfClosing) open.push(name!);
  }
  expect(open).toEqual([]);
  expect(svg).toContain("Bench &#60;2&#62; &#38; &#34;tank&#34;");
});

test("it has a title and a description that say where the sensors go and what it gives", () => {
  expect(svg).toMatch(/role="img" aria-labelledby="title description"/);
  expect(svg).toMatch(/<title id="title">[^<]*where to put 4 sensors<\/title>/);
  const described = /<desc id="description">([^<]*)<\/desc>/.exec(svg)![1]!;
  for (const station of plan.chosen.best.stations)
    expect(described).toContain(`${(1200 * station).toFixed(0)} mm`);
  expect(described).toContain(`${(100 * plan.chosen.best.error.total).toFixed(2)} % of body length`);
});

test("a dot on the body for each best place, and a mark for each place that is compared", () => {
  expect(count(/<circle class="sensor"/g)).toBe(4);
  expect(count(/class="open"/g)).toBe(4 + 3);
});

test("every number in it is one", () => {
  expect(svg).not.toMatch(/NaN|Infinity|undefined/);
});

test("nothing is fetched: no fonts, images or links from elsewhere", () => {
  expect(svg.replace('xmlns="http://www.w3.org/2000/svg"', "")).not.toMatch(
    /https?:|@import|@font-face|href|src=/,
  );
});

test("its colours are the dashboard's, by daylight", () => {
  const sheet = readFileSync(join(packageRoot, "dashboard", "look", "base.css"), "utf8");
  const day = /:root\[data-light="day"\] \{([^}]*)\}/.exec(sheet)![1]!;
  for (const [name, colour] of Object.entries(DAYLIGHT)) expect(day).toContain(`--${name}: ${colour};`);
});
