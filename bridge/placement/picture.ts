/**
 * A placement plan as a picture (SVG): the body from above with its true envelope, the ruler with the sensors at their best
 * places, and how far the midline will be off along the body, all on one ruler from nose to tail. For screen and paper:
 * no fonts of its own, no ground when printed.
 */
import { DAYLIGHT, TYPE } from "../drawing/daylight.ts";
import { area, escaped, line, type Point, pointer, polyline, text } from "../drawing/svg.ts";
import type { Gait } from "../numeric/gaits.ts";
import { taper } from "../wire/taper.ts";
import { millimetres, noiseText, type PlanSubject, percent, placementNames, rangeText } from "./describe.ts";
import type { Placement, PlacementPlan } from "./plan.ts";
import { SwimmingBody } from "./swimming-body.ts";

export interface PictureSubject extends PlanSubject {
  readonly body: { readonly kind: "animal" | "dummy" | "foil"; readonly widthMm?: number | undefined };
  readonly gait: Gait;
}

const STYLE = `
text { ${TYPE}; fill: ${DAYLIGHT.ink} }
.soft { fill: ${DAYLIGHT.soft} } .name { font-weight: 650; font-size: 12px; fill: ${DAYLIGHT.soft} } .strong { font-weight: 650 }
.title { font-size: 15px; font-weight: 650 } .sub { font-size: 13px } .figure { font-size: 44px }
.end { text-anchor: end } .middle { text-anchor: middle } .tight { font-size: 9px }
.hair { stroke: ${DAYLIGHT.hairline} } .scale { stroke: ${DAYLIGHT.soft} } .shadow { stroke: ${DAYLIGHT.soft}; stroke-opacity: 0.3; stroke-width: 0.7 }
.edge { stroke: ${DAYLIGHT.soft}; stroke-dasharray: 2 2 } .even { stroke: ${DAYLIGHT.ink}; stroke-dasharray: 5 3 }
.faint { fill: ${DAYLIGHT.faint} } .ground { fill: ${DAYLIGHT.ground} } .body { fill: url(#along) } .total { fill-opacity: 0.25 }
.open { fill: none; stroke: ${DAYLIGHT.soft} } .sensor { fill: ${DAYLIGHT.ink}; stroke: ${DAYLIGHT.ground}; stroke-width: 2 }
@media print { .ground { fill: none } }`;

const WIDTH = 960;
const GUTTER = 24;
const LEFT = 156;
const RULER = 700;
const RIGHT = LEFT + RULER;
/** Where the lanes begin, from the top. */
const ABOVE = 92;
const ABOVE_HALF = 88;
const PLACES = ABOVE + 2 * ABOVE_HALF + 20;
const ERROR = PLACES + 158;
const ERROR_HALF = 72;
const FOOT = ERROR + 2 * ERROR_HALF + 46;
const HEIGHT = FOOT + 44;
/** Body width as a share of its length where the rig does not say; drawn within these limits, pixels. */
const USUAL_WIDTH = 0.1;
const DRAWN_WIDTH = { least: 9, most: 28 };
const OUTLINE = Array.from({ length: 201 }, (_, i) => i / 200);
/** Moments of the cycle for the envelope; every fourth is drawn. */
const MOMENTS = 48;

/** @returns an SVG document */
export function drawPlan(subject: PictureSubject, plan: PlacementPlan): string {
  const { best } = plan.chosen;
  const title = `${subject.rigName}: where to put ${best.stations.length} sensors`;
  return `<svg xmlns="http://www.w3.org/2000/svg" width="${WIDTH}" height="${HEIGHT}" viewBox="0 0 ${WIDTH} ${HEIGHT}" role="img" aria-labelledby="title description">
<title id="title">${escaped(title)}</title>
<desc id="description">${escaped(description(subject, plan))}</desc>
<style>${STYLE}</style>
<defs>${gradient()}</defs>
<rect class="ground" width="${WIDTH}" height="${HEIGHT}"/>
${[
  ...heading(title, subject, best),
  ...fromAbove(subject, best),
  ...places(subject, plan),
  ...errorAlongTheBody(subject, plan),
  ...footnotes(subject),
].join("\n")}
</svg>
`;
}

function description({ lengthMm }: PlanSubject, { present, chosen: { even, best } }: PlacementPlan): string {
  const at = best.stations.map((station) => `${millimetres(station, lengthMm, 0)} mm`).join(", ");
  const [ofPresent, ofEven] = [present, even].map(({ error }) => percent(error.total));
  return (
    `Sensors at ${at} from the nose. Expected error of the midline ${percent(best.error.total)} % of body length; ` +
    `evenly spaced ${ofEven} %, as the rig has its ${present.stations.length} sensors ${ofPresent} %.`
  );
}

function heading(title: string, { wave, interpolation, lengthMm }: PlanSubject, best: Placement): string[] {
  return [
    text(GUTTER, 38, title, 'class="title"'),
    text(GUTTER, 60, `${lengthMm} mm, ${wave}, ${interpolation} between sensors`, 'class="soft sub"'),
    text(WIDTH - GUTTER - 27, 50, percent(best.error.total), 'class="figure end"'),
    text(WIDTH - GUTTER, 50, "% L", 'class="soft sub end"'),
    text(
      WIDTH - GUTTER,
      70,
      `expected error of the midline, ${millimetres(best.error.total, lengthMm)} mm RMS`,
      'class="soft end"',
    ),
  ];
}

function fromAbove({ gait, body, lengthMm }: PictureSubject, best: Placement): string[] {
  const middle = ABOVE + ABOVE_HALF;
  const moments = Array.from({ length: MOMENTS }, (_, i) => {
    const swimming = new SwimmingBody(gait, (2 * Math.PI * i) / MOMENTS);
    return OUTLINE.map((station) => swimming.position(station).y + swimming.noseLateral);
  });
  const envelope = OUTLINE.map((_, k) => Math.max(...moments.map((laterals) => laterals[k])));
  const width = ((body.widthMm ?? USUAL_WIDTH * lengthMm) / lengthMm) * RULER;
  const half = Math.min(DRAWN_WIDTH.most, Math.max(DRAWN_WIDTH.least, width)) / 2;
  const sideways = (ABOVE_HALF - half) / Math.max(...envelope, 1e-3);
  const toPoints = (laterals: readonly number[], sign = 1): Point[] =>
    laterals.map((lateral, k) => ({ x: stationX(OUTLINE[k]), y: middle - sign * sideways * lateral }));
  const tails = moments.map((laterals) => laterals.at(-1)!);
  const shown = toPoints(moments[tails.indexOf(Math.max(...tails))]);
  const [left, right] = ribbon(shown, (station) => half * taper(body.kind, station));
  return [
    ...laneName(ABOVE + 12, "From above", "left of body up", `sideways × ${(sideways / RULER).toFixed(1)}`),
    area(toPoints(envelope), toPoints(envelope, -1), 'class="faint"'),
    ...moments
      .filter((_, i) => i % 4 === 0)
      .map((laterals) => polyline(toPoints(laterals), 'class="shadow"')),
    polyline(toPoints(envelope), 'class="edge"'),
    polyline(toPoints(envelope, -1), 'class="edge"'),
    area(left, right, 'class="body"'),
    ...best.stations.map((station) => {
      const y = between(shown, station);
      return `<circle class="sensor" cx="${stationX(station).toFixed(1)}" cy="${y.toFixed(1)}" r="4.5"/>`;
    }),
  ];
}

/** The ruler, the best places beneath it with their figures, the even and the rig's own places beneath those. */
function places({ lengthMm }: PlanSubject, plan: PlacementPlan): string[] {
  const { best, even } = plan.chosen;
  const names = placementNames(plan);
  const scale = PLACES + 26;
  const gaps = best.stations.slice(1).map((station, i) => RULER * (station - best.stations[i]));
  const figures = `class="middle${Math.min(...gaps) < 32 ? " tight" : ""}"`;
  const ticks = Array.from({ length: 51 }, (_, k) => {
    const x = stationX(k / 50);
    return line({ x, y: scale }, { x, y: scale - (k % 10 === 0 ? 9 : k % 5 === 0 ? 6 : 3) }, 'class="scale"');
  });
  const labels = Array.from({ length: 6 }, (_, k) =>
    text(
      stationX(k / 5),
      scale - 14,
      k === 0 ? "nose" : k === 5 ? "tail" : `${20 * k} %`,
      'class="soft middle"',
    ),
  );
  const row = (
    y: number,
    name: string,
    { stations, error }: Placement,
    style: (station: number) => string,
  ) => [
    text(GUTTER, y + 9, name, 'class="name"'),
    ...stations.map((station) => pointer(stationX(station), y, 5, style(station))),
    text(WIDTH - GUTTER, y + 9, `${percent(error.total)} % L`, `class="end strong"`),
  ];
  return [
    rule(PLACES),
    line({ x: LEFT, y: scale }, { x: RIGHT, y: scale }, 'class="scale"'),
    ...ticks,
    ...labels,
    ...row(scale + 6, names.best, best, () => 'class="body"'),
    text(GUTTER, scale + 32, "% of the body", 'class="soft"'),
    text(GUTTER, scale + 47, "mm from the nose", 'class="soft"'),
    ...best.stations.flatMap((station) => [
      text(stationX(station), scale + 32, (100 * station).toFixed(1), figures),
      text(stationX(station), scale + 47, millimetres(station, lengthMm, 0), figures),
    ]),
    ...row(scale + 66, names.even, even, () => 'class="open"'),
    ...row(scale + 90, names.present, plan.present, () => 'class="open"'),
  ];
}

function errorAlongTheBody({ lengthMm }: PlanSubject, { chosen: { even, best } }: PlacementPlan): string[] {
  const middle = ERROR + ERROR_HALF + 18;
  const most = Math.max(...best.error.local.total, ...even.error.local.total) * lengthMm;
  const perMm = ERROR_HALF / most;
  const along = (shares: Float64Array, sign: 1 | -1): Point[] =>
    Array.from(shares, (share, k) => ({
      x: stationX(k / (shares.length - 1)),
      y: middle - sign * perMm * lengthMm * share,
    }));
  const band = (shares: Float64Array, style: string) => area(along(shares, 1), along(shares, -1), style);
  const step = roundStep(most / 2);
  const lines = Math.floor(most / step + 1e-9);
  const grid = Array.from({ length: 2 * lines + 1 }, (_, i) => (i - lines) * step).flatMap((mm) => {
    const y = middle - perMm * mm;
    return [
      line({ x: LEFT, y }, { x: RIGHT, y }, 'class="hair"'),
      text(
        LEFT - 8,
        y + 4,
        mm === 0 ? "0 mm" : `${mm > 0 ? "+" : "−"}${+Math.abs(mm).toPrecision(2)}`,
        'class="soft end"',
      ),
    ];
  });
  const key = ERROR + 62;
  return [
    rule(ERROR),
    ...laneName(ERROR + 24, "Midline off by", "± RMS over a cycle"),
    `<rect x="${GUTTER}" y="${key}" width="14" height="9" class="body total"/>`,
    text(GUTTER + 20, key + 9, "total", 'class="soft"'),
    `<rect x="${GUTTER}" y="${key + 18}" width="14" height="9" class="body"/>`,
    text(GUTTER + 20, key + 27, "shape alone", 'class="soft"'),
    line({ x: GUTTER, y: key + 41 }, { x: GUTTER + 14, y: key + 41 }, 'class="even"'),
    text(GUTTER + 20, key + 45, "total, evenly", 'class="soft"'),
    ...grid,
    band(best.error.local.total, 'class="body total"'),
    band(best.error.local.shape, 'class="body"'),
    polyline(along(even.error.local.total, 1), 'class="even"'),
    polyline(along(even.error.local.total, -1), 'class="even"'),
  ];
}

function footnotes(subject: PlanSubject): string[] {
  const notes = [
    "Shape: what the guess between and beyond exact sensors costs, against the true midline, both from the nose.",
    `Total: together with each sensor's own error, ${noiseText(subject)}. L: body length. Here ${rangeText(subject)}.`,
  ];
  return [rule(FOOT - 18), ...notes.map((note, i) => text(GUTTER, FOOT + 4 + 16 * i, note, 'class="soft"'))];
}

function stationX(station: number): number {
  return LEFT + RULER * station;
}

/** A hairline across, where a lane begins. */
function rule(y: number): string {
  return line({ x: GUTTER, y: y + 0.5 }, { x: WIDTH - GUTTER, y: y + 0.5 }, 'class="hair"');
}

function laneName(y: number, name: string, ...notes: readonly string[]): string[] {
  return [
    text(GUTTER, y, name, 'class="name"'),
    ...notes.map((note, i) => text(GUTTER, y + 16 * (i + 1), note, 'class="soft"')),
  ];
}

/** Both sides of a body along a line. */
function ribbon(centre: readonly Point[], halfWidth: (station: number) => number): [Point[], Point[]] {
  const last = centre.length - 1;
  const side = (sign: 1 | -1) =>
    centre.map(({ x, y }, k) => {
      const before = centre[Math.max(0, k - 1)];
      const after = centre[Math.min(last, k + 1)];
      const length = Math.hypot(after.x - before.x, after.y - before.y);
      const half = (sign * halfWidth(k / last)) / length;
      return { x: x + half * (after.y - before.y), y: y - half * (after.x - before.x) };
    });
  return [side(1), side(-1)];
}

/** Height of a line of evenly spaced points at a station. */
function between(points: readonly Point[], station: number): number {
  const at = station * (points.length - 1);
  const k = Math.min(Math.floor(at), points.length - 2);
  return points[k].y + (at - k) * (points[k + 1].y - points[k].y);
}

/** The greatest of 1, 2 and 5 times a power of ten that is not above `most`. */
function roundStep(most: number): number {
  const power = 10 ** Math.floor(Math.log10(most));
  return [5, 2, 1].map((times) => times * power).find((step) => step <= most)!;
}

function gradient(): string {
  const stops = [1, 2, 3, 4, 5].map(
    (i) => `<stop offset="${(i - 1) / 4}" stop-color="${DAYLIGHT[`body-${i}` as keyof typeof DAYLIGHT]}"/>`,
  );
  return `<linearGradient id="along" gradientUnits="userSpaceOnUse" x1="${LEFT}" x2="${RIGHT}" y1="0" y2="0">${stops.join("")}</linearGradient>`;
}
