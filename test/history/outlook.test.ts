import { describe, expect, it } from "vitest";
import { describeHistories, sentencesOn } from "../../bridge/history/describe.ts";
import { FIGURE_KEYS, type FigureKey, type TrialHealth } from "../../bridge/history/figures.ts";
import { DAY_MS, historiesOf, type NamedTrial } from "../../bridge/history/outlook.ts";
import { drawHistories } from "../../bridge/history/picture.ts";

const START_MS = Date.UTC(2026, 2, 2, 9);
const AHEAD_DAYS = 28;
const each = (value: number | null) =>
  Object.fromEntries(FIGURE_KEYS.map((key) => [key, value])) as Record<FigureKey, number | null>;

/** A trial of one sensor whose figure `key` is `value` against a limit of 10; null: it never lay still. */
function trial(
  day: number,
  value: number | null,
  key: FigureKey = "gyroBiasDegPerS",
  serial = "K-1",
): NamedTrial {
  const figures = value === null ? each(null) : { ...each(1), [key]: value };
  const health: TrialHealth = {
    startedAt: new Date(START_MS + day * DAY_MS).toISOString(),
    rigName: "Bench",
    durationS: 60,
    flags: {},
    sensors: [
      {
        name: "S1",
        serial,
        model: "nine axes",
        restS: value === null ? 0 : 9,
        figures,
        limits: each(10),
        gyroHeadroomPercent: 60,
        accelHeadroomPercent: 60,
        deliveredPercent: 99,
        flags: {},
        rests: [],
      },
    ],
  };
  return { trial: `day-${day}`, health };
}

const series = (values: readonly (number | null)[], stepDays: number, key?: FigureKey) =>
  values.map((value, i) => trial(i * stepDays, value, key));
const outlookOf = (trials: readonly NamedTrial[], key: FigureKey = "gyroBiasDegPerS") =>
  historiesOf(trials, AHEAD_DAYS)[0]!.figures[key].outlook;

describe("what to expect of a figure", () => {
  it("leaves its limit when its trend gets there in time, and says when", () => {
    // One a week from 4: 10 is reached six weeks after the start, a week and a half after the last trial.
    const outlook = outlookOf(series([4, 5, 6, 7, 8, 8.5], 7));
    expect(outlook).toMatchObject({ kind: "leaving", limit: 10 });
    const days = outlook.kind === "leaving" ? (outlook.atMs - START_MS) / DAY_MS : Number.NaN;
    expect(Math.abs(days - 42)).toBeLessThan(3);
  });

  it("stays within it when the trend gets there later", () => {
    expect(outlookOf(series([1, 1.1, 1.2, 1.3, 1.4], 7))).toMatchObject({ kind: "changing", aheadDays: 28 });
  });

  it("is never looked further ahead than the trials reach back", () => {
    // Over four days it rose by 2: in four more it will not reach 10, in twenty-eight it would.
    expect(outlookOf(series([5, 5.5, 6, 6.5, 7], 1))).toMatchObject({ kind: "changing", aheadDays: 4 });
  });

  it("is told to be beyond since the first trial of the unbroken last ones", () => {
    expect(outlookOf(series([1, 12, 1, 11, 12], 7))).toMatchObject({
      kind: "beyond",
      since: "day-21",
      last: 12,
    });
  });

  it("has no trend where ups and downs take turns, nor by one bad trial", () => {
    expect(outlookOf(series([1, 3, 2, 3, 1, 2], 7))).toEqual({ kind: "steady" });
    expect(outlookOf(series([2, 2, 2, 9, 2, 2], 7))).toEqual({ kind: "steady" });
  });

  it("is not judged by fewer than five trials that know it, and not at all by none", () => {
    expect(outlookOf(series([1, 3, 5, null, 7], 7))).toEqual({ kind: "early" });
    expect(outlookOf(series([null, null], 7))).toEqual({ kind: "unknown" });
  });

  it("leaves a limit below zero only where it may be below zero", () => {
    const falling = [-4, -5, -6, -7, -8];
    expect(outlookOf(series(falling, 7, "fieldOffPercent"), "fieldOffPercent")).toMatchObject({
      kind: "leaving",
    });
    expect(outlookOf(series([5, 4, 3, 2, 1], 7))).toMatchObject({ kind: "changing" });
  });

  it("does not depend on the order in which trials were read", () => {
    const trials = series([4, 5, 6, 7, 8, 8.5], 7);
    expect(historiesOf([...trials].reverse(), AHEAD_DAYS)).toEqual(historiesOf(trials, AHEAD_DAYS));
  });
});

describe("in words", () => {
  it("says what is wrong first, and says that a trial had no rest", () => {
    const trials = [...series([4, 5, 6, 7, 8, 8.5], 7), trial(49, null)];
    const [first, ...others] = sentencesOn(historiesOf(trials, AHEAD_DAYS)[0]!);
    expect(first).toMatchObject({ severity: "caution" });
    expect(first!.text).toMatch(
      /^Gyro bias rises by 1 °\/s a week and will leave its limit of 10\.00 about 2026-04-1\d/,
    );
    expect(others.map(({ text }) => text).join("\n")).toMatch(/Without rest.*: 1 of 7 trials/);
  });

  it("says of a figure that moved within a trial from where to where", () => {
    const moved = trial(0, 1);
    const rest = {
      startS: 0,
      stillS: 3,
      gyroBiasDegPerS: 1,
      gyroNoiseDegPerSPerSqrtHz: 0.01,
      accelNoiseMicroGPerSqrtHz: 1,
      gravityMPerS2: 9.8,
      fieldUT: null,
    };
    moved.health.sensors[0]!.rests.push(rest, { ...rest, startS: 40, gyroBiasDegPerS: 3.6 });
    const text = describeHistories(historiesOf([moved], AHEAD_DAYS));
    expect(text).toContain("Within trial day-0 its gyro bias went from 1.00 to 3.60 °/s.");
    expect(text).not.toContain("gyro noise went");
    expect(text).toMatch(/Too early to tell a trend, for which 5 trials are needed: gyro bias,/);
  });
});

describe("names from outside", () => {
  const hostile = trial(0, 12, "gyroBiasDegPerS", '<script>"&\u001b[2J\u0000');
  const named = historiesOf([{ ...hostile, trial: "</text><b>\u0007" }], AHEAD_DAYS);

  it("are text in the picture, and no sign in it that XML cannot hold", () => {
    const svg = drawHistories(named, AHEAD_DAYS);
    expect(svg).not.toMatch(/<script|<b>|[^\P{Cc}\n]/u);
    expect(svg).toContain("&#60;script&#62;&#34;&#38;\ufffd[2J\ufffd");
    expect(svg).toContain("since trial &#60;/text&#62;&#60;b&#62;\ufffd");
    const open: string[] = [];
    for (const [, closing, name, selfClosing] of svg.matchAll(/<(\/?)([a-zA-Z]+)[^>]*?(\/?)>/g)) {
      if (closing) expect(open.pop()).toBe(name);
      else if (!selfClosing) open.push(name!);
    }
    expect(open).toEqual([]);
  });

  it("cannot move the terminal's cursor", () => {
    expect(describeHistories(named)).not.toMatch(/[^\P{Cc}\n]/u);
  });

  it("a picture of no sensor at all is a picture, too", () => {
    expect(drawHistories([], AHEAD_DAYS)).toMatch(/^<svg [\s\S]*0 sensors over no trials[\s\S]*<\/svg>\n$/);
  });
});
