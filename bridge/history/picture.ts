/**
 * Sensors over their trials as a picture (SVG): a row a sensor; bias, noise and field over time, each against its limit, and
 * the robust line where there is a trend, as far as it was looked ahead. For screen and paper: no fonts of its own, no
 * ground when printed.
 */
import { DAYLIGHT, TYPE } from "../drawing/daylight.ts";
import { escaped, line, text } from "../drawing/svg.ts";
import { dayOf, measured, plain, sentencesOn, whereabouts } from "./describe.ts";
import { FIGURES, type FigureKey } from "./figures.ts";
import { DAY_MS, type SensorHistory } from "./outlook.ts";

const DRAWN = ["gyroBiasDegPerS", "gyroNoiseDegPerSPerSqrtHz", "fieldOffPercent"] as const;
const STYLE = `
text { ${TYPE}; fill: ${DAYLIGHT.ink} }
.soft { fill: ${DAYLIGHT.soft} } .name { font-weight: 650; font-size: 13px } .title { font-size: 15px; font-weight: 650 } .end { text-anchor: end }
.alarm-text { fill: ${DAYLIGHT.alarm}; font-weight: 650 } .caution-text { fill: ${DAYLIGHT.caution}; font-weight: 650 }
.hair { stroke: ${DAYLIGHT.hairline} } .scale { stroke: ${DAYLIGHT.soft} } .limit { stroke: ${DAYLIGHT.alarm}; stroke-dasharray: 5 3 }
.trend { stroke: ${DAYLIGHT["body-4"]}; stroke-width: 1.5 } .ahead { stroke: ${DAYLIGHT["body-4"]}; stroke-width: 1.5; stroke-dasharray: 2 3 }
.point { fill: ${DAYLIGHT["body-4"]} } .beyond { fill: ${DAYLIGHT.alarm} } .leaving { fill: ${DAYLIGHT.caution} } .ground { fill: ${DAYLIGHT.ground} }
@media print { .ground { fill: none } }`;

const WIDTH = 960;
const GUTTER = 24;
const TOP = 78;
/** A cell: its left border, the room for its scale, its plot. */
const CELL = (WIDTH - 2 * GUTTER) / DRAWN.length;
const SCALE = 52;
const PLOT = CELL - SCALE - 18;
const PLOT_HEIGHT = 84;
/** Keeps the first trial off the scale. */
const INSET = 8;
const SENTENCE = 16;
/** Above the plot: the sensor's name and where it was; below it: days, and space. */
const ABOVE_PLOT = 50;
const BELOW_PLOT = 40;

interface Span {
  readonly fromMs: number;
  readonly toMs: number;
  /** The last trial; beyond it only lines go on. */
  readonly lastMs: number;
}

/** @param trendAheadDays how far beyond the last trial the pictures reach; @returns an SVG document */
export function drawHistories(histories: readonly SensorHistory[], trendAheadDays: number): string {
  const starts = histories.flatMap(({ appearances }) => appearances.map(({ startMs }) => startMs));
  const fromMs = Math.min(...starts);
  const lastMs = Math.max(...starts);
  const aheadMs = Math.min(trendAheadDays * DAY_MS, lastMs - fromMs);
  // A single trial stands in the middle of two days.
  const margin = lastMs === fromMs ? DAY_MS : 0;
  const span = { fromMs: fromMs - margin, toMs: lastMs + aheadMs + margin, lastMs };
  const rows: string[] = [];
  let y = TOP;
  for (const history of histories) {
    const sentences = sentencesOn(history).filter(({ severity }) => severity !== null);
    rows.push(...sensorRow(history, sentences, y, span));
    y += ABOVE_PLOT + PLOT_HEIGHT + BELOW_PLOT + SENTENCE * sentences.length;
  }
  const title = `${histories.length === 1 ? "1 sensor" : `${histories.length} sensors`} over ${histories.length === 0 ? "no trials" : `trials from ${dayOf(fromMs)} to ${dayOf(lastMs)}`}`;
  const told = histories.flatMap((history) =>
    sentencesOn(history)
      .filter(({ severity }) => severity !== null)
      .map((sentence) => `${plain(history.serial)}: ${sentence.text}`),
  );
  return `<svg xmlns="http://www.w3.org/2000/svg" width="${WIDTH}" height="${y}" viewBox="0 0 ${WIDTH} ${y}" role="img" aria-labelledby="title description">
<title id="title">${escaped(title)}</title>
<desc id="description">${escaped(told.join(" ") || "Nothing leaves its limit.")}</desc>
<style>${STYLE}</style>
<rect class="ground" width="${WIDTH}" height="${y}"/>
${[text(GUTTER, 38, title, 'class="title"'), ...key(), ...rows].join("\n")}
</svg>
`;
}

function key(): string[] {
  const y = 56;
  const sample = (x: number, style: string) => line({ x, y }, { x: x + 22, y }, style);
  return [
    dot(GUTTER + 4, y, false),
    text(GUTTER + 14, y + 4, "a trial", 'class="soft"'),
    dot(GUTTER + 76, y, true),
    text(GUTTER + 86, y + 4, "beyond its limit", 'class="soft"'),
    sample(GUTTER + 190, 'class="limit"'),
    text(GUTTER + 218, y + 4, "limit", 'class="soft"'),
    sample(GUTTER + 266, 'class="trend"'),
    text(GUTTER + 294, y + 4, "trend", 'class="soft"'),
    sample(GUTTER + 344, 'class="ahead"'),
    text(GUTTER + 372, y + 4, "if it goes on so", 'class="soft"'),
  ];
}

function sensorRow(
  history: SensorHistory,
  sentences: ReturnType<typeof sentencesOn>,
  top: number,
  span: Span,
): string[] {
  const plotTop = top + ABOVE_PLOT + SENTENCE * sentences.length;
  return [
    line({ x: GUTTER, y: top + 0.5 }, { x: WIDTH - GUTTER, y: top + 0.5 }, 'class="hair"'),
    text(GUTTER, top + 22, plain(history.serial), 'class="name"'),
    text(WIDTH - GUTTER, top + 22, whereabouts(history), 'class="soft end"'),
    ...sentences.flatMap(({ severity, text: told }, i) => {
      const y = top + 22 + SENTENCE * (i + 1);
      return [
        severity === "alarm" ? square(GUTTER + 4, y - 4) : diamond(GUTTER + 4, y - 4),
        text(GUTTER + 14, y, told, `class="${severity}-text"`),
      ];
    }),
    ...DRAWN.flatMap((figure, c) => cell(history, figure, GUTTER + c * CELL, plotTop, span)),
  ];
}

function cell(
  { appearances, figures }: SensorHistory,
  figure: FigureKey,
  left: number,
  top: number,
  span: Span,
): string[] {
  const { name, unit, digits, signed } = FIGURES[figure];
  const { limit, line: trend } = figures[figure];
  const points = appearances.flatMap(({ startMs, sensor }) => {
    const value = sensor.figures[figure];
    const bound = sensor.limits[figure];
    return value === null ? [] : [{ startMs, value, beyond: bound !== null && Math.abs(value) > bound }];
  });
  const from = left + SCALE;
  const bottom = top + PLOT_HEIGHT;
  const title = text(from, top - 8, `${name}, ${unit}`, 'class="soft"');
  const floor = line({ x: from, y: bottom }, { x: from + PLOT, y: bottom }, 'class="scale"');
  if (points.length === 0)
    return [title, floor, text(from + 6, top + PLOT_HEIGHT / 2, "not known in any trial", 'class="soft"')];
  const most = 1.15 * Math.max(limit ?? 0, ...points.map(({ value }) => Math.abs(value)), 1e-9);
  const least = signed ? -most : 0;
  const x = (ms: number) => from + INSET + ((PLOT - INSET) * (ms - span.fromMs)) / (span.toMs - span.fromMs);
  const y = (value: number) => bottom - (PLOT_HEIGHT * (value - least)) / (most - least);
  const level = (value: number, style: string) => [
    line({ x: from, y: y(value) }, { x: from + PLOT, y: y(value) }, `class="${style}"`),
    text(
      from - 6,
      y(value) + 4,
      value.toFixed(value === 0 ? 0 : digits).replace("-", "−"),
      'class="soft end"',
    ),
  ];
  const limits = limit === null ? [] : signed ? [limit, -limit] : [limit];
  const day = (ms: number, style: string) => text(x(ms), bottom + 15, dayOf(ms), `class="soft ${style}"`);
  return [
    title,
    floor,
    ...level(0, signed ? "hair" : "scale"),
    ...limits.flatMap((value) => level(value, "limit")),
    day(span.fromMs, ""),
    day(span.toMs, "end"),
    ...(trend === null ? [] : trendLines(trend, points[0]!.startMs, span, x, y, [least, most])),
    ...points.map(({ startMs, value, beyond }) =>
      dot(x(startMs), y(value), beyond, `${dayOf(startMs)}: ${measured(value.toFixed(digits), figure)}`),
    ),
  ];
}

/** Solid over the trials, dashed beyond; cut where it leaves the plot. */
function trendLines(
  { startMs, slope, atStart }: NonNullable<SensorHistory["figures"][FigureKey]["line"]>,
  firstMs: number,
  { lastMs, toMs }: Span,
  x: (ms: number) => number,
  y: (value: number) => number,
  [least, most]: readonly [number, number],
): string[] {
  const leaves = startMs + ((slope > 0 ? most : least) - atStart) / slope;
  const piece = (fromMs: number, untilMs: number, style: string) => {
    const until = Math.min(untilMs, leaves);
    if (until <= fromMs) return [];
    const at = (ms: number) => ({ x: x(ms), y: y(atStart + slope * (ms - startMs)) });
    return [line(at(fromMs), at(until), `class="${style}"`)];
  };
  return [...piece(firstMs, lastMs, "trend"), ...piece(lastMs, toMs, "ahead")];
}

/** A trial; a square beyond the limit, so that colour does not say it alone. */
function dot(x: number, y: number, beyond: boolean, title = ""): string {
  const told = title === "" ? "" : `<title>${escaped(title)}</title>`;
  if (beyond) return square(x, y, told);
  return `<circle class="point" cx="${x.toFixed(1)}" cy="${y.toFixed(1)}" r="3.5">${told}</circle>`;
}

function square(x: number, y: number, inside = ""): string {
  return `<rect class="beyond" x="${(x - 4).toFixed(1)}" y="${(y - 4).toFixed(1)}" width="8" height="8">${inside}</rect>`;
}

function diamond(x: number, y: number): string {
  return `<path class="leaving" d="M${x} ${y - 5}L${x + 5} ${y}L${x} ${y + 5}L${x - 5} ${y}Z"/>`;
}
