/** The gait numbers as rows of text: value, scatter between beats, and why one is not to be trusted. */
import type { GaitNumber } from "../../bridge/wire/gait.ts";
import type { GaitNumberView, TailbeatView } from "../../bridge/wire/messages.ts";
import { millimetres, percent } from "./text.ts";

export interface GaitRow {
  readonly name: string;
  readonly value: string;
  readonly beside: string;
  /** A reason not to trust the value, in a word; "" when it is good. */
  readonly doubt: string;
  /** What is meant exactly; shown on pointing at the name. */
  readonly meaning: string;
}

interface RowShape {
  readonly number: GaitNumber;
  readonly name: string;
  readonly meaning: string;
  readonly value: (value: number) => string;
  /** What stands before the scatter. */
  readonly beside?: (value: number, lengthM: number) => string;
  /** The scatter; as a share of the value where left out. */
  readonly spread?: (spread: number) => string;
}

const degrees = (digits: number) => (rad: number) => `${((rad * 180) / Math.PI).toFixed(digits)}°`;
/** Digits in threes, apart by a narrow space that does not break (ISO 80000-1). */
const inThousands = (value: number) => value.toFixed(0).replace(/\B(?=(\d{3})+$)/g, "\u202f");
const inLengths = (m: number, lengthM: number) => `${percent(m / lengthM, 1)} L`;

const SHAPES: readonly RowShape[] = [
  {
    number: "tailAmplitudeM",
    name: "Tail amplitude",
    meaning: "peak to peak across the travel axis; L is the body length",
    value: millimetres,
    beside: inLengths,
  },
  {
    number: "headAmplitudeM",
    name: "Head amplitude",
    meaning: "peak to peak of the nose across the travel axis",
    value: millimetres,
    beside: inLengths,
  },
  {
    number: "phaseLag",
    name: "Phase lag",
    meaning: "of the tail tip behind the nose, per body length; 360° is one whole wave on the body",
    value: degrees(0),
    spread: degrees(1),
  },
  {
    number: "wavelengthM",
    name: "Wavelength",
    meaning: "along the body, from the growth of the phase in its rear part; negative when it runs forwards",
    value: millimetres,
    beside: (m, lengthM) => `${(m / lengthM).toFixed(2)} L`,
  },
  {
    number: "waveSpeedMPerS",
    name: "Wave speed",
    meaning: "wavelength times frequency",
    value: (speed) => `${speed.toFixed(2)} m/s`,
  },
  {
    number: "travellingIndex",
    name: "Travelling index",
    meaning: "1: the wave travels; 0: it stands. Complex orthogonal decomposition, Feeny 2008",
    value: (index) => index.toFixed(2),
  },
  {
    number: "meanBend",
    name: "Mean bend",
    meaning:
      "heading at the nose less that at the tail tip, over the whole beat; nose turned left is positive",
    value: degrees(1),
    spread: degrees(1),
  },
  {
    number: "strouhal",
    name: "Strouhal number",
    meaning:
      "frequency times tail amplitude over flow speed; 0.2 to 0.4 in cruising swimmers (Taylor, Nudds and Thomas 2003)",
    value: (strouhal) => strouhal.toFixed(2),
  },
  {
    number: "slip",
    name: "Slip ratio",
    meaning: "flow speed over wave speed; below 1 while the wave drives the body",
    value: (slip) => slip.toFixed(2),
  },
  {
    number: "reynolds",
    name: "Reynolds number",
    meaning: "flow speed times body length over the water's kinematic viscosity",
    value: (reynolds) => inThousands(Number(reynolds.toPrecision(3))),
    spread: () => "",
  },
];

/** Of a frequency, for the large number. */
export const FREQUENCY_MEANING =
  "beats a second; a steady fish at more than 5 Hz swims about 0.75 times that, less 1, body lengths a second (Bainbridge 1958)";

/** The rows of a beat; "–" where a number is not known. */
export function gaitRows(numbers: TailbeatView["numbers"] | undefined, lengthM: number): GaitRow[] {
  return SHAPES.map((shape) => {
    const { value, spread, doubts } = numbers?.[shape.number] ?? { value: null, spread: null, doubts: [] };
    const parts = value === null ? [] : [shape.beside?.(value, lengthM), spreadOf(shape, value, spread)];
    return {
      name: shape.name,
      value: value === null ? "–" : shape.value(value).replace("-", "−"),
      beside: parts.filter((part) => part !== undefined && part !== "").join("  "),
      doubt: doubts[0] ?? "",
      meaning: doubts.length > 1 ? `${shape.meaning}. Doubted: ${doubts.join(", ")}` : shape.meaning,
    };
  });
}

/** "± 2.1 %". Nothing for a single beat. */
function spreadOf(shape: RowShape, value: number, spread: GaitNumberView["spread"]): string {
  if (spread === null) return "";
  const text = (shape.spread ?? ((s: number) => percent(s / Math.abs(value), 1)))(spread);
  return text === "" ? "" : `± ${text}`;
}
