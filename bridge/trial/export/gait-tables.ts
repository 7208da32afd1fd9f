/**
 * The export's tables of tailbeats: `gait` with one row a cycle, `envelope` with its half amplitude along the body, `bouts`
 * with one row a steady bout; and the whole trial's steady swimming for the summary. Every number has a stem and a unit:
 * wave_speed_m_per_s in a cycle, wave_speed_mean_m_per_s and wave_speed_sd_m_per_s in a bout.
 */
import { RunningSpread } from "../../numeric/running-spread.ts";
import { DEG_PER_RAD } from "../../numeric/units.ts";
import { DOUBT_WORDS, doubtWords, GAIT_NUMBERS, type GaitNumber, type GaitNumbers } from "../../wire/gait.ts";
import { TableFile } from "./table-file.ts";
import {
  type Column,
  DECIMALS,
  integer,
  number,
  STATION_COUNT,
  seconds,
  type Table,
  text,
} from "./tables.ts";

/** A complete tailbeat cycle, as wave/gait-cycle.ts describes it. Borrowed. */
export interface ExportedCycle {
  readonly startS: number;
  readonly endS: number;
  readonly envelopeM: Float64Array;
  readonly numbers: GaitNumbers;
  readonly doubts: GaitNumbers;
  readonly spread: GaitNumbers;
}

/** A bout of steady swimming. */
export interface ExportedBout {
  readonly startS: number;
  readonly endS: number;
  readonly cycles: number;
  readonly numbers: Readonly<Record<GaitNumber, RunningSpread>>;
}

interface GaitColumn {
  readonly stem: string;
  /** As in the column's name; "" for pure numbers. */
  readonly suffix: string;
  readonly unit: string;
  /** What a value in SI is multiplied by. */
  readonly factor: number;
  readonly decimals: number;
  readonly meaning: string;
}

const pure = { suffix: "", unit: "1", factor: 1, decimals: 4 } as const;
const length = { suffix: "_mm", unit: "mm", factor: 1000, decimals: DECIMALS.mm } as const;
const angle = { suffix: "_deg", unit: "deg", factor: DEG_PER_RAD, decimals: DECIMALS.degrees } as const;

/** Decimals as elsewhere in the export; of pure numbers and hertz four: a tailbeat of 10 s timed to 1 ms differs there. */
const COLUMNS: Readonly<Record<GaitNumber, GaitColumn>> = {
  frequencyHz: {
    ...pure,
    stem: "frequency",
    suffix: "_hz",
    unit: "Hz",
    meaning: "tailbeat frequency, from one crossing of the tail's mean line to the next the same way",
  },
  tailAmplitudeM: {
    ...length,
    stem: "tail_amplitude",
    meaning: "peak to peak of the tail tip across the travel axis",
  },
  headAmplitudeM: {
    ...length,
    stem: "head_amplitude",
    meaning: "peak to peak of the nose across the travel axis",
  },
  phaseLag: {
    ...angle,
    stem: "phase_lag",
    meaning: "phase of the fundamental at the tail tip behind that at the nose, per body length",
  },
  wavelengthM: {
    ...length,
    stem: "wavelength",
    meaning:
      "length along the body over which the phase grows by one turn, in the rear part; negative: forwards",
  },
  waveSpeedMPerS: {
    ...pure,
    stem: "wave_speed",
    suffix: "_m_per_s",
    unit: "m/s",
    meaning: "wavelength times frequency",
  },
  travellingIndex: {
    ...pure,
    stem: "travelling_index",
    meaning: "1 for a travelling wave, 0 for a standing one (complex orthogonal decomposition, Feeny 2008)",
  },
  meanBend: {
    ...angle,
    stem: "mean_bend",
    meaning:
      "heading at the nose less that at the tail tip, averaged over the cycle; nose turned left positive",
  },
  strouhal: { ...pure, stem: "strouhal_number", meaning: "frequency times tail amplitude over flow speed" },
  slip: { ...pure, stem: "slip_ratio", meaning: "flow speed over wave speed" },
  reynolds: {
    ...pure,
    stem: "reynolds_number",
    decimals: 0,
    meaning: "flow speed times body length over kinematic viscosity",
  },
};

/** Numbers whose scatter stands in every cycle's row. */
const SPREAD_IN_ROW = ["frequencyHz", "tailAmplitudeM", "waveSpeedMPerS"] as const;

const sentence = (words: string) => `${words.charAt(0).toUpperCase()}${words.slice(1)}.`;

function column(name: GaitNumber, part: "" | "_mean" | "_sd"): Column {
  const { stem, suffix, unit, meaning } = COLUMNS[name];
  const lead = { "": "", _mean: "Mean over the bout: ", _sd: "Standard deviation between cycles: " }[part];
  return number(`${stem}${part}${suffix}`, unit, sentence(lead + meaning));
}

const cycleColumns = [
  integer("cycle", "Counts cycles from 1."),
  seconds("start_s", "Hub time of the cycle's start."),
  seconds("end_s", "Hub time of the cycle's end."),
];

export const GAIT: Table = {
  name: "gait",
  description: "One row a tailbeat cycle.",
  columns: [
    ...cycleColumns,
    ...GAIT_NUMBERS.map((name) => column(name, "")),
    number("tail_amplitude_percent_of_length", "%", "The tail's amplitude as a share of body length."),
    number("head_amplitude_percent_of_length", "%", "The head's amplitude as a share of body length."),
    ...SPREAD_IN_ROW.map((name) =>
      number(
        `${COLUMNS[name].stem}_cv`,
        "1",
        "Coefficient of variation over the last cycles (the rig's gait.spreadCycles).",
      ),
    ),
    text(
      "quality",
      `Why which numbers are not to be trusted, or not known: a reason, a colon and the columns, then a semicolon before the next. Empty when all are good. Reasons: ${DOUBT_WORDS.join(", ")}.`,
    ),
  ],
};

export const ENVELOPE: Table = {
  name: "envelope",
  description: "Amplitude envelope, one row a tailbeat cycle: half of peak to peak across the travel axis.",
  columns: [
    integer("cycle", "As in the gait table."),
    ...Array.from({ length: STATION_COUNT }, (_, i) =>
      number(
        `half_amplitude_mm_${String(i).padStart(3, "0")}`,
        "mm",
        `At ${((100 * i) / (STATION_COUNT - 1)).toFixed(1)} % of body length.`,
      ),
    ),
  ],
};

export const BOUTS: Table = {
  name: "bouts",
  description:
    "One row a bout of steady swimming (the rig's gait criterion), over the numbers to be trusted of its cycles.",
  columns: [
    integer("bout", "Counts bouts from 1."),
    seconds("start_s", "Hub time of the first cycle's start."),
    seconds("end_s", "Hub time of the last cycle's end."),
    integer("cycles", "How many tailbeat cycles."),
    ...GAIT_NUMBERS.flatMap((name) => [column(name, "_mean"), column(name, "_sd")]),
  ],
};

export const GAIT_TABLES: readonly Table[] = [GAIT, ENVELOPE, BOUTS];

export class GaitTables {
  readonly #lengthM: number;
  readonly #gait: TableFile;
  readonly #envelope: TableFile;
  readonly #bouts: TableFile;
  #cycles = 0;
  #boutCount = 0;
  #boutCycles = 0;
  #boutS = 0;
  /** Over all bouts. */
  readonly #all = new Map(GAIT_NUMBERS.map((name) => [name, new RunningSpread()]));

  /** @throws BendwatchError EXPORT_FAILED */
  constructor(folder: string, lengthM: number) {
    this.#lengthM = lengthM;
    this.#gait = new TableFile(folder, GAIT);
    this.#envelope = new TableFile(folder, ENVELOPE);
    this.#bouts = new TableFile(folder, BOUTS);
  }

  get files(): readonly TableFile[] {
    return [this.#gait, this.#envelope, this.#bouts];
  }

  cycle({ startS, endS, numbers, doubts, spread, envelopeM }: ExportedCycle): void {
    this.#cycles++;
    const { cells } = this.#gait;
    cells.number(this.#cycles, 0);
    cells.number(startS, DECIMALS.time);
    cells.number(endS, DECIMALS.time);
    for (const name of GAIT_NUMBERS) this.#cell(this.#gait, name, numbers[name]);
    cells.number((100 * numbers.tailAmplitudeM) / this.#lengthM, 3);
    cells.number((100 * numbers.headAmplitudeM) / this.#lengthM, 3);
    for (const name of SPREAD_IN_ROW) cells.number(spread[name] / Math.abs(numbers[name]), 5);
    cells.text(qualityOf(doubts));
    this.#gait.endRow();
    this.#envelope.cells.number(this.#cycles, 0);
    for (const halfM of envelopeM) this.#envelope.cells.number(halfM * 1000, DECIMALS.mm);
    this.#envelope.endRow();
  }

  bout({ startS, endS, cycles, numbers }: ExportedBout): void {
    this.#boutCount++;
    this.#boutCycles += cycles;
    this.#boutS += endS - startS;
    const { cells } = this.#bouts;
    cells.number(this.#boutCount, 0);
    cells.number(startS, DECIMALS.time);
    cells.number(endS, DECIMALS.time);
    cells.number(cycles, 0);
    for (const name of GAIT_NUMBERS) {
      this.#cell(this.#bouts, name, numbers[name].mean);
      this.#cell(this.#bouts, name, numbers[name].deviation);
      this.#all.get(name)!.merge(numbers[name]);
    }
    this.#bouts.endRow();
  }

  /** The trial's steady swimming: every number's mean and standard deviation between cycles; null where there is none. */
  summary(): object {
    const numbers: Record<string, object> = {};
    for (const [name, spread] of this.#all) {
      const { stem, suffix, factor } = COLUMNS[name];
      numbers[`${stem}${suffix}`] = {
        mean: known(spread.mean * factor),
        standardDeviation: known(spread.deviation * factor),
        cycles: spread.count,
      };
    }
    return {
      cycles: this.#cycles,
      steady: { bouts: this.#boutCount, cycles: this.#boutCycles, durationS: this.#boutS, numbers },
    };
  }

  #cell({ cells }: TableFile, name: GaitNumber, value: number): void {
    const { factor, decimals } = COLUMNS[name];
    cells.number(value * factor, decimals);
  }
}

/** "below noise: head_amplitude_mm phase_lag_deg; no flow speed: slip_ratio". */
function qualityOf(doubts: GaitNumbers): string {
  return DOUBT_WORDS.flatMap((word) => {
    const doubted = GAIT_NUMBERS.filter((name) => doubtWords(doubts[name]).includes(word));
    if (doubted.length === 0) return [];
    return [`${word}: ${doubted.map((name) => COLUMNS[name].stem + COLUMNS[name].suffix).join(" ")}`];
  }).join("; ");
}

function known(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
