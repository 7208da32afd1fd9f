/** What an import found and what it made of it, for the operator to read before trusting the trial. */

/**
 * One sensor's share of the sweeps: present + held + lost + absent = sweeps.
 */
export interface SensorSummary {
  readonly name: string;
  /** Sweeps with a new reading of at least one part. */
  present: number;
  /** Sweeps whose row repeats the one before, and so is no new reading. */
  held: number;
  /** Sweeps whose row has no whole part. */
  lost: number;
  /** Sweeps for which this sensor's table has no row. */
  absent: number;
  /** Among the present ones: readings without a whole gyro, accel or mag. */
  readonly without: { gyro: number; accel: number; mag: number };
}

export interface FileSummary {
  readonly path: string;
  readonly rows: number;
  readonly comments: number;
  /** Cells that are no numbers, each taken as a lost reading. */
  readonly badCells: number;
  /** Columns that the map declares as ignored, and those it does not mention. */
  readonly ignored: readonly string[];
  readonly unmentioned: readonly string[];
}

export interface ImportSummary {
  readonly files: readonly FileSummary[];
  readonly sweeps: number;
  /** Sweeps missing from regular data, by its gaps in time. */
  readonly lostSweeps: number;
  /** The first row's time in the table's own time, and the time from there to the last, s. */
  readonly startS: number;
  readonly spanS: number;
  /** From the usual interval between rows (see grid.ts). */
  readonly rateHz: number;
  readonly regular: boolean;
  readonly rigRateHz: number;
  readonly sensors: readonly SensorSummary[];
}

/** A rig's rate further from the table's than this share is pointed out. */
const RATE_TOLERANCE = 0.1;

/** The summary as lines of text. */
export function formatImportSummary(summary: ImportSummary): string {
  const { sweeps, lostSweeps, startS, spanS, rateHz, regular, rigRateHz } = summary;
  const gaps = regular ? `${lostSweeps} lost by gaps in time` : "irregular times, kept as they are";
  const lines = [
    ...summary.files.flatMap(fileLines),
    `${sweeps} sweeps over ${spanS.toFixed(3)} s from ${startS.toFixed(3)} s, ${rateHz.toFixed(2)} Hz; ${gaps}`,
  ];
  if (Math.abs(rateHz / rigRateHz - 1) > RATE_TOLERANCE) {
    lines.push(`The rig says ${rigRateHz} Hz: set hub.rateHz to what the table has, or check the time unit.`);
  }
  return [...lines, ...summary.sensors.map(sensorLine)].join("\n");
}

function fileLines(file: FileSummary): string[] {
  const skipped = [
    file.comments > 0 ? `comment lines: ${file.comments}` : "",
    file.ignored.length > 0 ? `columns ignored by the map: ${file.ignored.join(", ")}` : "",
    file.unmentioned.length > 0 ? `columns the map does not mention: ${file.unmentioned.join(", ")}` : "",
  ].filter((part) => part !== "");
  return [
    `${file.path}: ${file.rows} rows${file.badCells > 0 ? `; cells that are no numbers, taken as lost: ${file.badCells}` : ""}`,
    ...skipped.map((part) => `  left out: ${part}`),
  ];
}

function sensorLine({ name, present, held, lost, absent, without }: SensorSummary): string {
  const missing = Object.entries(without)
    .filter(([, count]) => count > 0)
    .map(([part, count]) => `, ${count} without ${part}`)
    .join("");
  return `${name}: ${present} readings${missing}; ${held} held, ${lost} lost, ${absent} without a row`;
}
