/**
 * Writes an export: CSV tables with units, described by datapackage.json, which is written last, so that a folder with
 * it is complete. Nothing in it depends on when or where the export is made: the same trial gives the same bytes.
 */
import { existsSync, mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import type { Compared } from "../../drive/drive-comparison.ts";
import { BendwatchError } from "../../errors.ts";
import type { LinkCounters } from "../../link/packets.ts";
import { toAngles } from "../../numeric/angles.ts";
import { DEG_PER_RAD } from "../../numeric/units.ts";
import type { Rig } from "../../rig/load.ts";
import type { Sweep } from "../../sweep.ts";
import type { Flag, Mark } from "../../wire/flag.ts";
import { TRUST_WORDS } from "../../wire/trust.ts";
import { BesideTables, type CameraSummary, cameraSummary, driveSummary } from "./beside-tables.ts";
import { DATA_PACKAGE_FILE, describePackage, SOFTWARE_PREFIX, SUMMARY_FILE } from "./data-package.ts";
import { FlagEvidence } from "./evidence.ts";
import { FrameMidlines } from "./frames.ts";
import { type ExportedBout, type ExportedCycle, GAIT_TABLES, GaitTables } from "./gait-tables.ts";
import { attempt, TableFile } from "./table-file.ts";
import { DECIMALS, FLAGS, FRAMES, MARKS, MIDLINE, SENSORS, STATION_COUNT, SYNC, TABLES } from "./tables.ts";

export interface ExportOptions {
  readonly folder: string;
  readonly trialName: string;
  readonly rig: Rig;
  readonly softwareVersion: string;
  /** Write into a folder that holds other things; only files of the export's own names are replaced. */
  readonly overwrite?: boolean;
}

/** What only the one who ran the pipeline knows. */
export interface ExportSummary {
  /** Start of the trial on the host's clock, ISO 8601, from its manifest. */
  readonly startedAt: string;
  readonly notes: string;
  readonly lostSweeps: number;
  /** How many sweeps' midlines were made by what between the sensors, and why not better. */
  readonly sweepsBy: Readonly<Record<string, number>>;
  readonly counters: Readonly<LinkCounters>;
  /** Sensors and stations against the drive; none where the rig file names no drive. */
  readonly drive?: readonly Compared[];
  /** null where no camera's midlines were given. */
  readonly camera?: CameraSummary | null;
  /** Settings of the recording and of the export. */
  readonly settings: Record<string, unknown>;
}

export class ExportWriter {
  readonly #options: ExportOptions;
  readonly #midline: TableFile;
  readonly #sensors: TableFile;
  readonly #gait: GaitTables;
  readonly #marks: TableFile;
  readonly #beside: BesideTables;
  /** There only when a pulse came. */
  #sync: TableFile | null = null;
  #frameTable: TableFile | null = null;
  readonly #frames: FrameMidlines;
  readonly #evidence: FlagEvidence;
  /** Newest state of each flag, by id. */
  readonly #flags = new Map<number, Flag>();
  readonly #angles = new Float64Array(3);
  readonly #counts = { sweeps: 0, tailbeats: 0, marks: 0, syncEdges: 0 };
  #firstS = Number.NaN;
  #lastS = Number.NaN;

  /**
   * Makes the folder, or takes over one that is empty or holds an earlier export.
   * @throws BendwatchError EXPORT_FAILED when it holds other things and `overwrite` is not given, or cannot be written
   */
  constructor(options: ExportOptions) {
    this.#options = options;
    const { folder } = options;
    prepareFolder(folder, options.overwrite ?? false);
    this.#midline = new TableFile(folder, MIDLINE);
    this.#sensors = new TableFile(folder, SENSORS);
    this.#gait = new GaitTables(folder, options.rig.body.lengthMm / 1000);
    this.#marks = new TableFile(folder, MARKS);
    this.#beside = new BesideTables(folder, options.rig);
    this.#frames = new FrameMidlines(options.rig.hub.rateHz, 3 * STATION_COUNT, (timeS, edge, midlineM) =>
      this.#frameRow(timeS, edge, midlineM),
    );
    this.#evidence = new FlagEvidence(folder, options.rig);
  }

  /**
   * One sweep.
   * @param midlineM x,y,z of STATION_COUNT points, m, earth axes, nose at the origin
   * @param orientations unit quaternions, 4 a sensor, scalar first, body axes to earth
   * @param trust TRUST of each sensor
   * @param bridged 1 where the sensor's orientation was predicted across lost samples
   */
  sweep(
    timeS: number,
    midlineM: Float64Array,
    orientations: Float64Array,
    trust: Uint8Array,
    bridged: Uint8Array,
  ): void {
    if (this.#counts.sweeps === 0) this.#firstS = timeS;
    this.#lastS = timeS;
    this.#counts.sweeps++;
    const { cells } = this.#midline;
    cells.number(timeS, DECIMALS.time);
    for (let i = 0; i < STATION_COUNT * 3; i++) cells.number(midlineM[i]! * 1000, DECIMALS.mm);
    this.#midline.endRow();
    this.#frames.sweep(timeS, midlineM);
    for (let sensor = 0; sensor < trust.length; sensor++) {
      this.#sensorRow(timeS, sensor, orientations, trust[sensor]!, bridged[sensor]!);
    }
  }

  #sensorRow(
    timeS: number,
    sensor: number,
    orientations: Float64Array,
    trust: number,
    bridged: number,
  ): void {
    const { cells } = this.#sensors;
    cells.number(timeS, DECIMALS.time);
    cells.text(this.#options.rig.sensors[sensor]!.name);
    for (let i = 0; i < 4; i++) cells.number(orientations[4 * sensor + i]!, DECIMALS.quaternion);
    toAngles(this.#angles, orientations, 0, 4 * sensor);
    for (let i = 0; i < 3; i++) cells.number(this.#angles[i]! * DEG_PER_RAD, DECIMALS.degrees);
    cells.text(TRUST_WORDS[trust]!);
    cells.number(bridged, 0);
    this.#sensors.endRow();
  }

  /** The readings of the same sweep, of which those about flags are exported. Borrowed. */
  readings(sweep: Sweep): void {
    this.#evidence.sweep(sweep);
  }

  /** A flag was raised, changed or ended; the newest state of each id is exported. */
  flag(flag: Flag): void {
    this.#evidence.flag(flag);
    this.#flags.set(flag.id, { ...flag });
  }

  /** A tailbeat cycle is complete. */
  beat(cycle: ExportedCycle): void {
    this.#counts.tailbeats++;
    this.#gait.cycle(cycle);
  }

  /** A steady bout has ended. */
  bout(bout: ExportedBout): void {
    this.#gait.bout(bout);
  }

  mark(mark: Mark): void {
    this.#counts.marks++;
    const { cells } = this.#marks;
    cells.number(mark.timeS, DECIMALS.time);
    cells.text(mark.text);
    cells.text(mark.from);
    this.#marks.endRow();
  }

  /** A camera frame pulse. */
  sync(timeS: number, edge: number): void {
    this.#counts.syncEdges++;
    this.#sync ??= new TableFile(this.#options.folder, SYNC);
    const file = this.#sync;
    file.cells.number(timeS, DECIMALS.time);
    file.cells.number(edge, 0);
    file.endRow();
    this.#frames.sync(timeS, edge);
  }

  #frameRow(timeS: number, edge: number, midlineM: Float64Array | null): void {
    this.#frameTable ??= new TableFile(this.#options.folder, FRAMES);
    const file = this.#frameTable;
    file.cells.number(timeS, DECIMALS.time);
    file.cells.number(edge, 0);
    for (let i = 0; i < 3 * STATION_COUNT; i++)
      file.cells.number((midlineM?.[i] ?? Number.NaN) * 1000, DECIMALS.mm);
    file.endRow();
  }

  /** What the drive did at a sweep's time: rad and m, NaN where it gives none. */
  reference(timeS: number, yaw: number, sway: number): void {
    this.#beside.reference(timeS, yaw, sway);
  }

  /** Writes the flags, the summary and the description; the export is complete. @throws BendwatchError EXPORT_FAILED */
  finish(summary: ExportSummary): void {
    const { folder, trialName, rig, softwareVersion } = this.#options;
    this.#frames.finish();
    this.#evidence.finish();
    this.#beside.compared(summary.drive ?? [], summary.camera ?? null);
    const flags = this.#writeFlags();
    const files = [
      this.#midline,
      this.#sensors,
      flags,
      ...this.#gait.files,
      this.#marks,
      ...[this.#evidence.file, this.#sync, this.#frameTable].filter((file) => file !== null),
      ...this.#beside.files,
    ];
    const written = files.map((file) => file.finish());
    writeJson(join(folder, SUMMARY_FILE), this.#summary(summary));
    writeJson(
      join(folder, DATA_PACKAGE_FILE),
      describePackage({ trialName, rigName: rig.name, softwareVersion }, written),
    );
  }

  #writeFlags(): TableFile {
    const file = new TableFile(this.#options.folder, FLAGS);
    const { cells } = file;
    for (const flag of [...this.#flags.values()].sort((a, b) => a.id - b.id)) {
      cells.text(flag.kind);
      cells.text(flag.sensor < 0 ? "" : this.#options.rig.sensors[flag.sensor]!.name);
      cells.text(flag.severity);
      cells.number(flag.startS, DECIMALS.time);
      cells.number(flag.endS ?? Number.NaN, DECIMALS.time);
      cells.text(flag.detail);
      file.endRow();
    }
    return file;
  }

  #summary(summary: ExportSummary): object {
    const { trialName, rig, softwareVersion } = this.#options;
    const { sweeps } = this.#counts;
    const durationS = sweeps === 0 ? 0 : this.#lastS - this.#firstS;
    const sent = sweeps + summary.lostSweeps;
    const flagsByKind: Record<string, number> = {};
    for (const { kind } of this.#flags.values()) flagsByKind[kind] = (flagsByKind[kind] ?? 0) + 1;
    return {
      trial: trialName,
      startedAt: summary.startedAt,
      notes: summary.notes,
      softwareVersion,
      durationS,
      nominalRateHz: rig.hub.rateHz,
      meanRateHz: durationS > 0 ? (sweeps - 1) / durationS : null,
      counts: {
        ...this.#counts,
        referenceSweeps: this.#beside.referenceSweeps,
        flags: this.#flags.size,
      },
      lostSweeps: summary.lostSweeps,
      lostShare: sent === 0 ? 0 : summary.lostSweeps / sent,
      gait: this.#gait.summary(),
      midlineSweepsBy: summary.sweepsBy,
      flagsByKind,
      packets: summary.counters,
      drive: driveSummary(summary.drive ?? []),
      camera: summary.camera ? cameraSummary(summary.camera, rig.body.lengthMm) : null,
      settings: summary.settings,
      rig,
    };
  }
}

/** Makes the folder fit to write into, and takes out what an earlier export left. */
function prepareFolder(folder: string, overwrite: boolean): void {
  attempt(folder, () => mkdirSync(folder, { recursive: true }));
  const names = attempt(folder, () => readdirSync(folder));
  if (names.length > 0 && !overwrite && !isExport(folder)) {
    throw new BendwatchError("EXPORT_FAILED", {
      where: folder,
      found: `a folder with ${names.length} files that are no earlier export`,
      expected: "an empty or new folder, an earlier export, or leave to overwrite",
    });
  }
  const own = [
    DATA_PACKAGE_FILE,
    SUMMARY_FILE,
    ...[...TABLES, ...GAIT_TABLES].map((table) => `${table.name}.csv`),
  ];
  for (const name of own) attempt(join(folder, name), () => rmSync(join(folder, name), { force: true }));
}

function isExport(folder: string): boolean {
  const path = join(folder, DATA_PACKAGE_FILE);
  if (!existsSync(path)) return false;
  try {
    const { software } = JSON.parse(readFileSync(path, "utf8")) as { software?: unknown };
    return typeof software === "string" && software.startsWith(SOFTWARE_PREFIX);
  } catch {
    return false;
  }
}

function writeJson(path: string, value: object): void {
  attempt(path, () => writeFileSync(path, `${JSON.stringify(value, null, 2)}\n`));
}
