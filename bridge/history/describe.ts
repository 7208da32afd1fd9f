/** Sensors over their trials in words: a table a sensor, and sentences on what to expect. */
import { FIGURE_KEYS, FIGURES, type FigureKey, type SensorHealth } from "./figures.ts";
import { type Appearance, LEAST_TRIALS, type Outlook, type SensorHistory } from "./outlook.ts";

/** A sentence, and whether something is wrong (alarm), will be (caution) or is only told. */
export interface Sentence {
  readonly severity: "alarm" | "caution" | null;
  readonly text: string;
}

const GLYPHS = { alarm: "■", caution: "◆" } as const;
/** Headings of the table: what, and in which unit. */
const HEADINGS: Readonly<Record<FigureKey, string>> = {
  gyroBiasDegPerS: "bias",
  gyroWanderDegPerH: "wander",
  gyroNoiseDegPerSPerSqrtHz: "gyro noise",
  accelNoiseMicroGPerSqrtHz: "accel noise",
  gravityOffMilliG: "gravity",
  fieldOffPercent: "field",
  lostPercent: "lost",
};

/** All sensors, for the terminal. */
export function describeHistories(histories: readonly SensorHistory[]): string {
  return histories.map(describeSensor).join("\n\n");
}

function describeSensor(history: SensorHistory): string {
  const { serial, appearances } = history;
  const limits = appearances.at(-1)!.sensor.limits;
  const figures = FIGURE_KEYS.filter((key) => appearances.some(({ sensor }) => sensor.figures[key] !== null));
  const rows = [
    ["started", "trial", "rest", ...figures.map((key) => HEADINGS[key]), "free: gyro", "accel", "flags"],
    ["", "", "s", ...figures.map((key) => FIGURES[key].unit), "%", "%", ""],
    ...appearances.map((appearance) => trialRow(appearance, figures)),
    ["", "at most", "", ...figures.map((key) => number(limits[key], key)), "", "", ""],
  ];
  const sentences = sentencesOn(history).map(({ severity, text }) =>
    severity === null ? `  ${text}` : `${GLYPHS[severity]} ${text}`,
  );
  return [`Sensor ${plain(serial)}: ${whereabouts(history)}`, ...table(rows), ...sentences].join("\n");
}

/** Name, rig, number of trials, first and last day. */
export function whereabouts({ appearances }: SensorHistory): string {
  const last = appearances.at(-1)!;
  const count = appearances.length === 1 ? "1 trial" : `${appearances.length} trials`;
  const days = [...new Set([dayOf(appearances[0]!.startMs), dayOf(last.startMs)])].join(" to ");
  return `${plain(last.sensor.name)} on ${plain(last.rigName)}, ${count}, ${days}`;
}

function trialRow({ trial, startMs, sensor }: Appearance, figures: readonly FigureKey[]): string[] {
  const { gyroHeadroomPercent, accelHeadroomPercent, flags } = sensor;
  return [
    new Date(startMs).toISOString().slice(0, 16).replace("T", " "),
    plain(trial),
    sensor.restS === 0 ? "none" : sensor.restS.toFixed(1),
    ...figures.map((key) => number(sensor.figures[key], key)),
    ...[gyroHeadroomPercent, accelHeadroomPercent].map((percent) =>
      percent === null ? "-" : percent.toFixed(0),
    ),
    Object.entries(flags)
      .map(([kind, count]) => (count === 1 ? kind : `${kind} ×${count}`))
      .join(", "),
  ];
}

/** What is to be said of a sensor, worst first. */
export function sentencesOn({ appearances, figures, drifts }: SensorHistory): Sentence[] {
  const sentences: Sentence[] = [];
  const steady: string[] = [];
  const early: string[] = [];
  for (const key of FIGURE_KEYS) {
    const { outlook } = figures[key];
    if (outlook.kind === "early") early.push(FIGURES[key].name);
    else if (outlook.kind === "steady") steady.push(FIGURES[key].name);
    else if (outlook.kind !== "unknown") sentences.push(sentenceOn(key, outlook));
  }
  const rank = ({ severity }: Sentence) => (severity === "alarm" ? 0 : severity === "caution" ? 1 : 2);
  sentences.sort((a, b) => rank(a) - rank(b));
  const tell = (text: string) => sentences.push({ severity: null, text });
  for (const { trial, figure, from, to } of drifts) {
    const [first, last] = [from, to].map((value) => number(value, figure));
    tell(
      `Within trial ${plain(trial)} its ${FIGURES[figure].name} went from ${first} to ${measured(last!, figure)}.`,
    );
  }
  if (steady.length > 0) tell(`No trend: ${steady.join(", ")}.`);
  if (early.length > 0)
    tell(`Too early to tell a trend, for which ${LEAST_TRIALS} trials are needed: ${early.join(", ")}.`);
  const restless = appearances.filter(({ sensor }) => sensor.restS === 0).length;
  if (restless > 0) {
    tell(
      `Without rest, so without figures at rest: ${restless === appearances.length ? "all of its trials" : `${restless} of ${appearances.length} trials`}. Leave the body lying for ten seconds before it swims.`,
    );
  }
  return sentences;
}

function sentenceOn(
  key: FigureKey,
  outlook: Exclude<Outlook, { kind: "steady" | "early" | "unknown" }>,
): Sentence {
  const { name } = FIGURES[key];
  const Name = name[0]!.toUpperCase() + name.slice(1);
  if (outlook.kind === "beyond") {
    const { last, limit, since } = outlook;
    const text = `${Name} is beyond its limit since trial ${plain(since)}: ${measured(number(last, key), key)}, at most ${number(limit, key)}.`;
    return { severity: "alarm", text };
  }
  const way = outlook.perWeek > 0 ? "rises" : "falls";
  const pace = `${Name} ${way} by ${measured(`${+Math.abs(outlook.perWeek).toPrecision(2)}`, key)} a week`;
  if (outlook.kind === "changing") {
    const { aheadDays } = outlook;
    const stays = aheadDays === null ? "" : `; within its limit for the next ${aheadDays.toFixed(0)} days`;
    return { severity: null, text: `${pace}${stays}.` };
  }
  const text = `${pace} and will leave its limit of ${number(outlook.limit, key)} about ${dayOf(outlook.atMs)} if it goes on so.`;
  return { severity: "caution", text };
}

export function measured(text: string, key: FigureKey): string {
  return `${text} ${FIGURES[key].unit}`;
}

function number(value: SensorHealth["figures"][FigureKey], key: FigureKey): string {
  if (value === null) return "-";
  const text = value.toFixed(FIGURES[key].digits);
  return (Number(text) === 0 ? text.replace("-", "") : text).replace("-", "−");
}

export function dayOf(ms: number): string {
  return new Date(ms).toISOString().slice(0, 10);
}

/** Names come from files: nothing in them may move the terminal's cursor. */
export function plain(text: string): string {
  return text.replace(/\p{Cc}/gu, "\ufffd");
}

/** Columns as wide as their widest; the first two and the last begin at the left, numbers end at the right. */
function table(rows: readonly (readonly string[])[]): string[] {
  const widths = rows[0]!.map((_, c) => Math.max(...rows.map((row) => row[c]!.length)));
  const left = (c: number) => c < 2 || c === widths.length - 1;
  return rows.map((row) =>
    `  ${row.map((cell, c) => (left(c) ? cell.padEnd(widths[c]!) : cell.padStart(widths[c]!))).join("  ")}`.trimEnd(),
  );
}
