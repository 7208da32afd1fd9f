/** The options of bendwatch layout, and what they say about body, range and number of sensors. */
import { BendwatchError } from "../errors.ts";
import { GAITS, type Gait, type GaitName, polynomialGait } from "../numeric/gaits.ts";
import type { PlanSubject } from "../placement/describe.ts";
import { type MountableRange, mostSensors } from "../placement/search.ts";
import type { Rig } from "../rig/load.ts";

export interface LayoutOptions {
  rig: string;
  sensors?: number;
  wave: GaitName;
  envelope?: number[];
  wavelength?: number;
  noiseDeg: number[];
  rangePercent?: number[];
  spacingPercent?: number;
  errorPercent?: number;
  picture?: string;
  json: boolean;
}

/** Amplitudes beyond this share of body length are taken for a slip of the unit. */
const MOST_AMPLITUDE = 0.5;
/** Shorter waves than this share of body length fall between the points of the midline. */
const LEAST_WAVELENGTH = 0.2;

/** Common practice, no source: near either tip there is no room for a unit, and units have a length of their own. */
const USUAL: MountableRange = { from: 0.05, to: 0.95, spacing: 0.03 };

/** @throws BendwatchError COMMAND_INVALID */
export function gaitOf({ wave: name, envelope, wavelength = GAITS[name].wavelength }: LayoutOptions): Gait {
  if (wavelength < LEAST_WAVELENGTH) {
    throw invalid("--wavelength", `${wavelength}`, `${LEAST_WAVELENGTH} body lengths or more`);
  }
  if (envelope === undefined) return { ...GAITS[name], wavelength };
  const gait = polynomialGait(envelope, wavelength);
  const amplitudes = Array.from({ length: 65 }, (_, i) => Math.abs(gait.amplitude(i / 64)));
  const most = Math.max(...amplitudes);
  if (!(most > 0 && most <= MOST_AMPLITUDE)) {
    throw invalid(
      "--envelope",
      `an amplitude of ${most.toPrecision(3)} body lengths`,
      `above 0 and at most ${MOST_AMPLITUDE}`,
    );
  }
  return gait;
}

/**
 * Where sensors can sit: as the options say, or the usual, stretched to what the rig itself does.
 * @throws BendwatchError COMMAND_INVALID
 */
export function rangeOf(
  { rangePercent, spacingPercent }: LayoutOptions,
  present: readonly number[],
): MountableRange {
  const gaps = present.slice(1).map((station, i) => station - present[i]);
  const spacing = spacingPercent === undefined ? Math.min(USUAL.spacing, ...gaps) : spacingPercent / 100;
  if (rangePercent === undefined) {
    return { from: Math.min(USUAL.from, present[0]), to: Math.max(USUAL.to, present.at(-1)!), spacing };
  }
  const [from, to] = rangePercent;
  if (rangePercent.length !== 2 || !(from >= 0 && from < to && to <= 100)) {
    throw invalid(
      "--range-percent",
      rangePercent.join(","),
      "two places, 0 to 100, the first nearer the nose",
    );
  }
  return { from: from / 100, to: to / 100, spacing };
}

/** @throws BendwatchError COMMAND_INVALID */
export function countOf(count: number, range: MountableRange): number {
  const most = mostSensors(range);
  if (count >= 1 && count <= most) return count;
  throw invalid(
    "--sensors",
    `${count}`,
    `1 to ${most}: as many as fit in --range-percent, --spacing-percent apart`,
  );
}

/** @throws BendwatchError COMMAND_INVALID */
export function subjectOf(rig: Rig, options: LayoutOptions, gait: Gait, range: MountableRange): PlanSubject {
  const { noiseDeg, envelope, errorPercent } = options;
  if (noiseDeg.length !== 2 || noiseDeg.some((sigma) => sigma < 0)) {
    throw invalid("--noise-deg", noiseDeg.join(","), "two numbers, 0 or more: inclination, heading");
  }
  return {
    rigName: rig.name,
    lengthMm: rig.body.lengthMm,
    wave: `${envelope === undefined ? options.wave : "given"} wave of ${gait.wavelength} body lengths`,
    interpolation: rig.midline.interpolation,
    noiseDeg: { inclination: noiseDeg[0], heading: noiseDeg[1] },
    range,
    wantedError: errorPercent === undefined ? null : errorPercent / 100,
  };
}

function invalid(where: string, found: string, expected: string): BendwatchError {
  return new BendwatchError("COMMAND_INVALID", { where, found, expected });
}
