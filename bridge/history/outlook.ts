/**
 * Sensors over their trials: the series of every figure by serial number, and what to expect of each.
 *
 * A trend is told when Sen's interval of the slope, 95 %, leaves out zero (numeric/theil-sen.ts), which takes five trials. Its
 * line is followed as far ahead as the threshold says, and never further than the trials reach back.
 */
import { theilSen } from "../numeric/theil-sen.ts";
import { FIGURE_KEYS, FIGURES, type FigureKey, type SensorHealth, type TrialHealth } from "./figures.ts";

export const DAY_MS = 86_400_000;
/** Fewest trials of which Sen's interval can leave out zero. */
export const LEAST_TRIALS = 5;
/** A figure that moves by this share of its limit within one trial is told: four such trials use all of it up. Ours. */
const WITHIN_SHARE = 0.25;
/** Those that single rests have, too. */
const OF_RESTS = ["gyroBiasDegPerS", "gyroNoiseDegPerSPerSqrtHz", "accelNoiseMicroGPerSqrtHz"] as const;

/** A trial by the name of its folder, and what is known of it. */
export interface NamedTrial {
  readonly trial: string;
  readonly health: TrialHealth;
}

/** One sensor in one trial. */
export interface Appearance {
  readonly trial: string;
  readonly startMs: number;
  readonly rigName: string;
  readonly sensor: SensorHealth;
}

export type Outlook =
  /** Beyond its limit in the last trial that knows it, and since `since`. */
  | { readonly kind: "beyond"; readonly since: string; readonly last: number; readonly limit: number }
  /** Will leave its limit at this time if the trend goes on. */
  | { readonly kind: "leaving"; readonly atMs: number; readonly perWeek: number; readonly limit: number }
  /** Changes, and stays within its limit for so many days; null where it has none. */
  | { readonly kind: "changing"; readonly perWeek: number; readonly aheadDays: number | null }
  | { readonly kind: "steady" }
  | { readonly kind: "early" }
  /** In no trial could it be known. */
  | { readonly kind: "unknown" };

export interface Line {
  readonly startMs: number;
  /** A millisecond. */
  readonly slope: number;
  readonly atStart: number;
}

export interface FigureHistory {
  readonly outlook: Outlook;
  /** The robust line, where a trend is told. */
  readonly line: Line | null;
  /** In the last trial. */
  readonly limit: number | null;
}

/** A figure that moved within one trial, from its first rest to its last. */
export interface Drift {
  readonly trial: string;
  readonly figure: (typeof OF_RESTS)[number];
  readonly from: number;
  readonly to: number;
}

export interface SensorHistory {
  readonly serial: string;
  /** In order of their start. */
  readonly appearances: readonly Appearance[];
  readonly figures: Readonly<Record<FigureKey, FigureHistory>>;
  readonly drifts: readonly Drift[];
}

/** All sensors that have a serial number, in the order of the numbers, each with its trials in the order of their start. */
export function historiesOf(trials: readonly NamedTrial[], trendAheadDays: number): SensorHistory[] {
  const bySerial = new Map<string, Appearance[]>();
  for (const { trial, health } of trials) {
    for (const sensor of health.sensors) {
      if (sensor.serial === "") continue;
      const appearances = bySerial.get(sensor.serial) ?? [];
      const startMs = Date.parse(health.startedAt);
      appearances.push({ trial, startMs, rigName: health.rigName, sensor });
      bySerial.set(sensor.serial, appearances);
    }
  }
  return [...bySerial]
    .sort(([a], [b]) => (a < b ? -1 : 1))
    .map(([serial, appearances]) => {
      appearances.sort((a, b) => a.startMs - b.startMs || (a.trial < b.trial ? -1 : 1));
      const figures = FIGURE_KEYS.map((key) => [key, followed(appearances, key, trendAheadDays)]);
      return { serial, appearances, figures: Object.fromEntries(figures), drifts: driftsOf(appearances) };
    });
}

function followed(appearances: readonly Appearance[], key: FigureKey, trendAheadDays: number): FigureHistory {
  const limit = appearances.at(-1)!.sensor.limits[key];
  const points = appearances.flatMap(({ trial, startMs, sensor: { figures, limits } }) => {
    const value = figures[key];
    const bound = limits[key];
    return value === null
      ? []
      : [{ trial, startMs, value, beyond: bound !== null && Math.abs(value) > bound }];
  });
  const last = points.at(-1);
  if (last === undefined) return { outlook: { kind: "unknown" }, line: null, limit };
  const line = lineThrough(points);
  const outlook = (): Outlook => {
    if (last.beyond && limit !== null) {
      const since = points[points.map(({ beyond }) => beyond).lastIndexOf(false) + 1]!.trial;
      return { kind: "beyond", since, last: last.value, limit };
    }
    if (points.length < LEAST_TRIALS) return { kind: "early" };
    if (line === null) return { kind: "steady" };
    const perWeek = line.slope * 7 * DAY_MS;
    if (limit === null) return { kind: "changing", perWeek, aheadDays: null };
    const aheadMs = Math.min(trendAheadDays * DAY_MS, last.startMs - points[0]!.startMs);
    const atMs = leavesAt(line, limit, FIGURES[key].signed);
    return atMs <= last.startMs + aheadMs
      ? { kind: "leaving", atMs: Math.max(atMs, last.startMs), perWeek, limit }
      : { kind: "changing", perWeek, aheadDays: aheadMs / DAY_MS };
  };
  return { outlook: outlook(), line, limit };
}

/** null where Sen's interval holds a slope of zero. */
function lineThrough(points: readonly { startMs: number; value: number }[]): Line | null {
  const startMs = points[0]!.startMs;
  const fit = theilSen(
    points.map((point) => point.startMs - startMs),
    points.map(({ value }) => value),
  );
  if (fit === null || (fit.low <= 0 && fit.high >= 0)) return null;
  return { startMs, slope: fit.slope, atStart: fit.start };
}

/** When a line passes its limit; Infinity when it goes away from it. */
function leavesAt({ startMs, slope, atStart }: Line, limit: number, signed: boolean): number {
  if (slope < 0 && !signed) return Number.POSITIVE_INFINITY;
  return startMs + ((slope > 0 ? limit : -limit) - atStart) / slope;
}

function driftsOf(appearances: readonly Appearance[]): Drift[] {
  return appearances.flatMap(({ trial, sensor: { rests, limits } }) =>
    OF_RESTS.flatMap((figure) => {
      const values = rests.map((rest) => rest[figure]).filter((value) => value !== null);
      const limit = limits[figure];
      if (values.length < 2 || limit === null) return [];
      const [from, to] = [values[0]!, values.at(-1)!];
      return Math.abs(to - from) >= WITHIN_SHARE * limit ? [{ trial, figure, from, to }] : [];
    }),
  );
}
