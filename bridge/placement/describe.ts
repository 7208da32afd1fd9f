/** A placement plan as text for the terminal. */
import { type CountRow, leastCount, type Placement, type PlacementPlan } from "./plan.ts";
import type { MountableRange } from "./search.ts";

/** What the plan was made for, in words and in units of display. */
export interface PlanSubject {
  readonly rigName: string;
  readonly lengthMm: number;
  /** e.g. "carangiform wave of 0.95 body lengths". */
  readonly wave: string;
  readonly interpolation: string;
  readonly noiseDeg: { readonly inclination: number; readonly heading: number };
  readonly range: MountableRange;
  /** Share of body length, or null. */
  readonly wantedError: number | null;
}

export function describePlan(subject: PlanSubject, plan: PlacementPlan): string {
  const { lengthMm } = subject;
  return [
    `${subject.rigName}: ${lengthMm} mm, ${subject.wave}, ${subject.interpolation} between sensors`,
    `Each sensor errs by ${noiseText(subject)}; ${rangeText(subject)}`,
    "",
    "Expected error of the midline, RMS over a cycle and all its points from the nose",
    ...placementTable(plan, lengthMm),
    "",
    "Best places",
    ...stationTable(plan.chosen.best, lengthMm),
    "",
    "How many",
    ...countTable(plan.byCount, lengthMm),
    ...(subject.wantedError === null ? [] : ["", wantedText(plan, subject.wantedError)]),
  ].join("\n");
}

export function noiseText({ noiseDeg }: PlanSubject): string {
  return `${noiseDeg.inclination}° in inclination and ${noiseDeg.heading}° in heading`;
}

export function rangeText({ range }: PlanSubject): string {
  const [from, to, spacing] = [range.from, range.to, range.spacing].map((share) => +(100 * share).toFixed(1));
  return `sensors can sit at ${from} to ${to} % of the body, ${spacing} % apart or more`;
}

/** The placements that are compared, in words. */
export function placementNames({
  present,
  chosen,
}: PlacementPlan): Record<"present" | "even" | "best", string> {
  return {
    present: `${present.stations.length} as in the rig file`,
    even: `${chosen.count} evenly`,
    best: `${chosen.count} at best places`,
  };
}

function placementTable(plan: PlacementPlan, lengthMm: number): string[] {
  const { present, chosen } = plan;
  const names = placementNames(plan);
  const row = (name: string, { error }: Placement) => [
    name,
    percent(error.shape),
    percent(error.noise),
    percent(error.total),
    millimetres(error.total, lengthMm),
    signed(error.tailAmplitude.rebuilt / error.tailAmplitude.true - 1),
  ];
  return columns([
    ["sensors", "shape, % L", "noise, % L", "total, % L", "total, mm", "tail amplitude, %"],
    row(names.present, present),
    row(names.even, chosen.even),
    row(names.best, chosen.best),
  ]);
}

function stationTable({ stations }: Placement, lengthMm: number): string[] {
  return columns([
    ["sensor", "station", "from the nose, mm"],
    ...stations.map((station, i) => [`${i + 1}`, station.toFixed(3), millimetres(station, lengthMm)]),
  ]);
}

function countTable(rows: readonly CountRow[], lengthMm: number): string[] {
  return columns([
    ["sensors", "evenly, % L", "best, % L", "evenly, mm", "best, mm"],
    ...rows.map(({ count, even, best }) => [
      `${count}`,
      percent(even.error.total),
      percent(best.error.total),
      millimetres(even.error.total, lengthMm),
      millimetres(best.error.total, lengthMm),
    ]),
  ]);
}

function wantedText(plan: PlacementPlan, wanted: number): string {
  const best = leastCount(plan, "best", wanted);
  const even = leastCount(plan, "even", wanted);
  const goal = `For ${percent(wanted)} % L`;
  if (best === null) {
    const { count, best: most } = plan.byCount.at(-1)!;
    return `${goal}: not with ${count} sensors, which come to ${percent(most.error.total)}; their noise alone makes ${percent(most.error.noise)}`;
  }
  return `${goal}: ${best} at the best places, ${even === null ? `more than ${plan.byCount.at(-1)!.count}` : even} evenly`;
}

/** Rows of cells as lines: the first column to the left, the others to the right. */
function columns(rows: readonly (readonly string[])[]): string[] {
  const widths = rows[0].map((_, i) => Math.max(...rows.map((row) => row[i].length)));
  return rows.map(
    (row) =>
      `  ${row.map((cell, i) => (i === 0 ? cell.padEnd(widths[0]) : cell.padStart(widths[i]))).join("   ")}`,
  );
}

export function percent(share: number): string {
  return (100 * share).toFixed(2);
}

function signed(share: number): string {
  const rounded = (100 * share).toFixed(1);
  return share > 0 ? `+${rounded}` : rounded;
}

export function millimetres(share: number, lengthMm: number, decimals = 1): string {
  return (share * lengthMm).toFixed(decimals);
}
