/** From merged rows to lines of the text layout: sequence, tick, presence, and the count of it all. */
import type { ColumnMap } from "../../rig/column-map.ts";
import type { Rig } from "../../rig/load.ts";
import { CHANNELS, createSweep, HAS_ACCEL, HAS_GYRO, HAS_MAG, type Sweep } from "../../sweep.ts";
import { type Grid, sequenceStep } from "./grid.ts";
import type { MergedRow } from "./merge.ts";
import type { FileSummary, ImportSummary, SensorSummary } from "./summary.ts";

/** Host time of a table's time 0 where its times are no dates: 2000-01-01T00:00:00Z, ms since 1970. */
export const IMPORT_EPOCH_MS = Date.UTC(2000, 0, 1);

/** Takes the imported bytes, one line a call. */
export interface ImportWriter {
  bytes(chunk: Uint8Array, hostTimeMs: number): void;
}

/** link's encodeTextLine: one sweep as a line of the text layout; parts whose presence bit is off are left empty. */
export type LineEncoder = (sweep: Sweep, models: Rig["models"]) => string;

export interface SweepLineOptions {
  readonly columnMap: ColumnMap;
  readonly rig: Rig;
  readonly encodeLine: LineEncoder;
}

/** Turns merged rows into sweeps, hands each over as one line of the text layout, and counts what they hold. */
export class SweepLines {
  readonly #options: SweepLineOptions;
  readonly #places: readonly (readonly number[])[];
  readonly #grid: Grid;
  readonly #writer: ImportWriter;
  readonly #epochMs: number;
  readonly #sweep: Sweep;
  readonly #sensors: SensorSummary[];
  #sweeps = 0;
  #sequence = 0;
  #startUs = 0;
  #lastUs = 0;

  /** @param places the rig's sensors (counting from 0) that each table holds */
  constructor(
    options: SweepLineOptions,
    places: readonly (readonly number[])[],
    grid: Grid,
    writer: ImportWriter,
  ) {
    this.#options = options;
    this.#places = places;
    this.#grid = grid;
    this.#writer = writer;
    this.#epochMs = options.columnMap.time.unit === "iso" ? 0 : IMPORT_EPOCH_MS;
    this.#sweep = createSweep(options.rig.sensors.length);
    this.#sensors = options.rig.sensors.map(({ name }) => ({
      name,
      present: 0,
      held: 0,
      lost: 0,
      absent: 0,
      without: { gyro: 0, accel: 0, mag: 0 },
    }));
  }

  write({ timeUs, rows }: MergedRow): void {
    const { encodeLine, rig } = this.#options;
    if (this.#sweeps === 0) this.#startUs = timeUs;
    else this.#sequence += sequenceStep(timeUs - this.#lastUs, this.#grid);
    this.#lastUs = timeUs;
    this.#sweeps++;
    const sweep = this.#sweep;
    sweep.sequence = this.#sequence % 2 ** 16;
    sweep.tickUs = ((timeUs % 2 ** 32) + 2 ** 32) % 2 ** 32;
    sweep.hostTimeMs = this.#epochMs + timeUs / 1000;
    rows.forEach((row, t) => {
      this.#places[t]!.forEach((sensor, s) => {
        const bits = row?.present[s] ?? 0;
        sweep.present[sensor] = bits;
        if (row !== null)
          sweep.raw.set(row.values.subarray(s * CHANNELS, (s + 1) * CHANNELS), sensor * CHANNELS);
        this.#count(
          sensor,
          row === null ? "absent" : row.held[s] ? "held" : bits === 0 ? "lost" : "present",
          bits,
        );
      });
    });
    this.#writer.bytes(Buffer.from(encodeLine(sweep, rig.models)), sweep.hostTimeMs);
  }

  #count(sensor: number, state: "present" | "held" | "lost" | "absent", bits: number): void {
    const summary = this.#sensors[sensor]!;
    summary[state]++;
    if (state !== "present") return;
    if ((bits & HAS_GYRO) === 0) summary.without.gyro++;
    if ((bits & HAS_ACCEL) === 0) summary.without.accel++;
    if ((bits & HAS_MAG) === 0 && this.#options.rig.models[sensor]!.mag !== undefined) summary.without.mag++;
  }

  summary(files: readonly FileSummary[]): ImportSummary {
    return {
      files,
      sweeps: this.#sweeps,
      lostSweeps: this.#sequence + 1 - this.#sweeps,
      startS: this.#startUs / 1e6,
      spanS: (this.#lastUs - this.#startUs) / 1e6,
      rateHz: 1e6 / this.#grid.intervalUs,
      regular: this.#grid.regular,
      rigRateHz: this.#options.rig.hub.rateHz,
      sensors: this.#sensors,
    };
  }
}
