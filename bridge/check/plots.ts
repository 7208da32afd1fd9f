/** The report's pictures: small inline SVG, drawn from figures and traces alone. */
import { DIRECTIONS } from "../calibration/sphere.ts";
import { html, type Markup } from "./markup.ts";
import type { ReportSensor, ReportStep } from "./report.ts";
import type { SupplyPoint } from "./supply.ts";

const INK = "#1B2426";
const HAIRLINE = "#D5D2C6";
const FAINT = "#ECE9DF";
const ALARM = "#B42318";
const BAR = "#3E57B5";
const SECOND = "#8A6A12";

const WIDTH = 640;
const LEFT = 130;
const RIGHT = 590;
const ROW = 18;

/** Colour alone tells nothing: each has its form, as on screen. */
export function glyph(kind: "good" | "caution" | "alarm" | "none"): Markup {
  const shapes = {
    good: html`<path d="M2 6.5 5 9.5 10 3" fill="none" stroke="currentColor" stroke-width="2"/>`,
    caution: html`<path d="M6 .8 11.2 6 6 11.2 .8 6Z" fill="currentColor"/>`,
    alarm: html`<rect x="1.2" y="1.2" width="9.6" height="9.6" fill="currentColor"/>`,
    none: html`<path d="M2 6H10" stroke="currentColor" stroke-width="1.5"/>`,
  };
  return html`<svg viewBox="0 0 12 12" width="12" height="12" aria-hidden="true">${shapes[kind]}</svg>`;
}

/** The ruler from nose to tail with the sensors at their places. @param bad names of sensors that something is wrong with */
export function ruler(sensors: readonly ReportSensor[], bad: ReadonlySet<string>): Markup {
  const x = (station: number) => 20 + station * (WIDTH - 40);
  // Names that would run into each other take turns on two lines.
  const crowded = sensors.some((sensor, i) => i > 0 && x(sensor.station) - x(sensors[i - 1]!.station) < 44);
  const marks = sensors.map(({ name, station, takenOut }, i) => {
    const at = x(station).toFixed(1);
    const colour = bad.has(name) ? ALARM : INK;
    const shape = takenOut
      ? html`<circle cx="${at}" cy="30" r="5" fill="#FFFFFF" stroke="${INK}" stroke-dasharray="2 2"/>`
      : bad.has(name)
        ? html`<rect x="${x(station) - 5}" y="25" width="10" height="10" fill="${colour}"/>`
        : html`<circle cx="${at}" cy="30" r="5" fill="${colour}"/>`;
    const label = shortened(name, 12);
    return html`${shape}<text class="name" x="${at}" y="${crowded && i % 2 === 1 ? 58 : 16}" text-anchor="middle">${label}</text>`;
  });
  return html`<svg viewBox="0 0 ${WIDTH} 64" role="img" aria-label="Sensors along the body, nose to tail"><line x1="20" y1="30" x2="${WIDTH - 20}" y2="30" stroke="${HAIRLINE}" stroke-width="2"/>${marks}<text x="20" y="${crowded ? 46 : 54}">nose</text><text x="${WIDTH - 20}" y="${crowded ? 46 : 54}" text-anchor="end">tail tip</text></svg>`;
}

/** Bars of one or two figures by sensor, with the limit as a line. */
export function bars(
  step: ReportStep,
  sensors: readonly ReportSensor[],
  names: readonly string[],
  most?: number,
): Markup {
  const rows = sensors
    .filter(({ takenOut }) => !takenOut)
    .map(({ name }) => ({
      name,
      figures: names.map((figure) => step.figures.find((f) => f.sensor === name && f.name === figure)),
    }));
  const all = rows.flatMap(({ figures }) => figures.flatMap((f) => (f?.value == null ? [] : [f])));
  const top = most ?? 1.1 * Math.max(...all.flatMap((f) => [f.value!, f.most ?? 0]), 1e-9);
  const x = (value: number) => LEFT + (Math.min(top, Math.max(0, value)) / top) * (RIGHT - LEFT);
  const height = rows.length * ROW + 8;
  const thickness = names.length === 1 ? 8 : 5;
  const drawn = rows.map(({ name, figures }, r) => {
    const y = r * ROW + 4;
    const lines = figures.map((f, k) => {
      if (f?.value == null) return html``;
      const at = y + k * (thickness + 1) + (names.length === 1 ? 3 : 1);
      const colour = !f.ok ? ALARM : k === 0 ? BAR : SECOND;
      const limit = f.least ?? f.most;
      const tick =
        limit === null
          ? null
          : html`<line x1="${x(limit).toFixed(1)}" x2="${x(limit).toFixed(1)}" y1="${at - 2}" y2="${at + thickness + 2}" stroke="${INK}"/>`;
      return html`<rect x="${LEFT}" y="${at}" width="${RIGHT - LEFT}" height="${thickness}" fill="${FAINT}"/><rect x="${LEFT}" y="${at}" width="${(x(f.value) - LEFT).toFixed(1)}" height="${thickness}" fill="${colour}"/>${tick}`;
    });
    return html`<text class="name" x="${LEFT - 8}" y="${y + 11}" text-anchor="end">${shortened(name, 18)}</text>${lines}`;
  });
  return html`<svg viewBox="0 0 ${WIDTH} ${height}" role="img" aria-label="${names.join(" and ")} by sensor">${drawn}</svg>`;
}

/** All directions on an equal-area map: longitude across, height up. Filled where the field was seen. */
export function coverage(seen: readonly boolean[], label: string): Markup {
  const dots = DIRECTIONS.map(([x, y, z], k) => {
    const cx = (70 + (Math.atan2(y, x) / Math.PI) * 64).toFixed(1);
    const cy = (30 - z * 26).toFixed(1);
    return seen[k]
      ? html`<circle cx="${cx}" cy="${cy}" r="2.4" fill="${BAR}"/>`
      : html`<circle cx="${cx}" cy="${cy}" r="2" fill="none" stroke="${ALARM}" stroke-width=".8"/>`;
  });
  return html`<svg viewBox="0 0 140 60" role="img" aria-label="${label}"><rect x=".5" y=".5" width="139" height="59" fill="none" stroke="${HAIRLINE}"/>${dots}</svg>`;
}

/** The hub's supply over the check, with its limit. */
export function supplyCourse(trace: readonly SupplyPoint[], leastV: number): Markup | null {
  const points = trace.filter((point): point is [number, number, number | null] => point[1] !== null);
  if (points.length < 2) return null;
  const volts = points.map(([, v]) => v);
  const low = Math.min(leastV, ...volts) - 0.1;
  const high = Math.max(leastV, ...volts) + 0.1;
  const [from, to] = [points[0]![0], points.at(-1)![0]];
  const x = (s: number) => (44 + ((s - from) / (to - from)) * (RIGHT - 44)).toFixed(1);
  const y = (v: number) => (86 - ((v - low) / (high - low)) * 76).toFixed(1);
  const line = points.map(([s, v], k) => `${k === 0 ? "M" : "L"}${x(s)} ${y(v)}`).join("");
  return html`<svg viewBox="0 0 ${WIDTH} 108" role="img" aria-label="Supply over the check"><line x1="44" x2="${RIGHT}" y1="${y(leastV)}" y2="${y(leastV)}" stroke="${ALARM}" stroke-dasharray="4 3"/><text x="${RIGHT + 6}" y="${Number(y(leastV)) + 4}">at least</text><text x="38" y="${Number(y(leastV)) + 4}" text-anchor="end">${leastV.toFixed(2)}</text><text x="38" y="${Number(y(volts[0]!)) + 4}" text-anchor="end">${volts[0]!.toFixed(2)}</text><line x1="44" x2="${RIGHT}" y1="90" y2="90" stroke="${HAIRLINE}"/><path d="${line}" fill="none" stroke="${BAR}" stroke-width="1.6"/><text x="44" y="103">${Math.round(from)} s</text><text x="${RIGHT}" y="103" text-anchor="end">${Math.round(to)} s</text></svg>`;
}

function shortened(name: string, most: number): string {
  return name.length <= most ? name : `${name.slice(0, most - 1)}…`;
}
