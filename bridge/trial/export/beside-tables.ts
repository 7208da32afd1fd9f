/** The tables of the body beside its drive and beside a camera; each is there only when it has rows. */
import type { BesideCamera } from "../../drive/camera-comparison.ts";
import type { Alignment } from "../../drive/camera-track.ts";
import type { Compared } from "../../drive/drive-comparison.ts";
import { DEG_PER_RAD } from "../../numeric/units.ts";
import type { Rig } from "../../rig/load.ts";
import { TableFile } from "./table-file.ts";
import { CAMERA, DECIMALS, DRIVE, REFERENCE, type Table } from "./tables.ts";

/** The midline beside a camera's, and how the camera's was laid upon it. */
export interface CameraSummary {
  readonly stations: readonly BesideCamera[];
  readonly overall: BesideCamera;
  readonly alignment: Alignment;
  /** Metres for one mm of the table: 0.001 where the camera's scale was right. */
  readonly scale: number;
  readonly frames: number;
  readonly leftOut: number;
}

export class BesideTables {
  readonly #folder: string;
  readonly #rig: Rig;
  readonly #files = new Map<Table, TableFile>();
  #referenceSweeps = 0;

  constructor(folder: string, rig: Rig) {
    this.#folder = folder;
    this.#rig = rig;
  }

  get files(): readonly TableFile[] {
    return [...this.#files.values()];
  }

  /** Rows of the reference table. */
  get referenceSweeps(): number {
    return this.#referenceSweeps;
  }

  /** What the drive did at a sweep's time: rad and m, NaN where it gives none. */
  reference(timeS: number, yaw: number, sway: number): void {
    this.#referenceSweeps++;
    const file = this.#table(REFERENCE);
    file.cells.number(timeS, DECIMALS.time);
    file.cells.number(yaw * DEG_PER_RAD, DECIMALS.degrees);
    file.cells.number(sway * 1000, DECIMALS.mm);
    file.endRow();
  }

  /** The trial's figures: sensors and stations against the drive, and against a camera. */
  compared(drive: readonly Compared[], camera: CameraSummary | null): void {
    for (const row of drive) this.#driveRow(row);
    if (camera !== null) for (const row of [...camera.stations, camera.overall]) this.#cameraRow(row);
  }

  #driveRow({ sensor, station, against, gain, lagS, rmse, rmseLagRemoved, r2 }: Compared): void {
    const file = this.#table(DRIVE);
    const { cells } = file;
    const degrees = against === "yaw" ? DEG_PER_RAD : Number.NaN;
    const mm = against === "sway" ? 1000 : Number.NaN;
    cells.text(sensor < 0 ? "" : this.#rig.sensors[sensor]!.name);
    cells.number(station, DECIMALS.ratio);
    cells.text(against);
    cells.number(gain, DECIMALS.ratio);
    cells.number(lagS * 1000, DECIMALS.ms);
    cells.number(rmse * degrees, DECIMALS.degrees);
    cells.number(rmseLagRemoved * degrees, DECIMALS.degrees);
    cells.number(rmse * mm, DECIMALS.mm);
    cells.number(rmseLagRemoved * mm, DECIMALS.mm);
    cells.number(r2, DECIMALS.ratio);
    file.endRow();
  }

  #cameraRow({ station, gain, lagS, rmseM, r2 }: BesideCamera): void {
    const file = this.#table(CAMERA);
    const { cells } = file;
    cells.number(station, DECIMALS.ratio);
    cells.number(gain, DECIMALS.ratio);
    cells.number(lagS * 1000, DECIMALS.ms);
    cells.number(rmseM * 1000, DECIMALS.mm);
    cells.number((rmseM * 1e5) / this.#rig.body.lengthMm, DECIMALS.ratio);
    cells.number(r2, DECIMALS.ratio);
    file.endRow();
  }

  #table(table: Table): TableFile {
    const file = this.#files.get(table) ?? new TableFile(this.#folder, table);
    this.#files.set(table, file);
    return file;
  }
}

/** The trial's figures by sensor, for who reads no tables; null where there is nothing to compare. */
export function driveSummary(drive: readonly Compared[]): object | null {
  if (drive.length === 0) return null;
  return {
    sensors: drive
      .filter(({ sensor }) => sensor >= 0)
      .map(({ station, gain, lagS, rmse, r2 }) => ({
        station,
        gain: known(gain),
        lagMs: known(lagS * 1000),
        rmseDeg: known(rmse * DEG_PER_RAD),
        r2: known(r2),
      })),
  };
}

/** All stations together, and how the camera's midlines were laid upon ours. */
export function cameraSummary(
  { overall, alignment, scale, frames, leftOut }: CameraSummary,
  lengthMm: number,
): object {
  const { turn, shift, residualM } = alignment;
  return {
    gain: known(overall.gain),
    lagMs: known(overall.lagS * 1000),
    rmseMm: known(overall.rmseM * 1000),
    rmsePercentLength: known((overall.rmseM * 1e5) / lengthMm),
    r2: known(overall.r2),
    alignment: {
      scale: scale * 1000,
      turnDeg: turn * DEG_PER_RAD,
      shiftMm: shift.map((metres) => metres * 1000),
      residualMm: residualM * 1000,
    },
    frames,
    framesLeftOut: leftOut,
  };
}

const known = (value: number) => (Number.isFinite(value) ? value : null);
