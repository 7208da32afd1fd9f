/**
 * What a flag was raised upon: the readings of its sensor (all sensors for the rig's flags) from some seconds before its
 * onset to some seconds after. They are taken from the trial's bytes whenever they are wanted, so nothing more is written
 * during a trial, and no flag is ever without them.
 */
import { DEG_PER_RAD } from "../../numeric/units.ts";
import type { Rig } from "../../rig/load.ts";
import { ACCEL, CHANNELS, GYRO, HAS_ACCEL, HAS_GYRO, HAS_MAG, MAG, type Sweep } from "../../sweep.ts";
import type { Flag } from "../../wire/flag.ts";
import { TableFile } from "./table-file.ts";
import { DECIMALS, EVIDENCE } from "./tables.ts";

const BEFORE_S = 2;
const AFTER_S = 2;
/** A flag may be raised so long after its onset (clock drift waits for a quarter of a minute), s. */
const HELD_S = 20;

interface Wanted {
  readonly id: number;
  readonly sensor: number;
  readonly fromS: number;
  readonly toS: number;
}

/** Parts of a reading: presence bit, place, and what makes the exported unit of it. */
const READINGS = [
  [HAS_GYRO, GYRO, DEG_PER_RAD],
  [HAS_ACCEL, ACCEL, 1],
  [HAS_MAG, MAG, 1],
] as const;

export class FlagEvidence {
  /** The table; null while no flag was raised. */
  file: TableFile | null = null;
  readonly #folder: string;
  readonly #names: readonly string[];
  readonly #sensorCount: number;
  /** The last sweeps, a ring of #capacity rows. */
  readonly #capacity: number;
  readonly #timeS: Float64Array;
  readonly #raw: Float64Array;
  readonly #present: Uint8Array;
  #sweeps = 0;
  readonly #seen = new Set<number>();
  #wanted: Wanted[] = [];

  /** @param folder the export's */
  constructor(folder: string, { sensors, hub: { rateHz } }: Rig) {
    const sensorCount = sensors.length;
    this.#folder = folder;
    this.#names = sensors.map(({ name }) => name);
    this.#sensorCount = sensorCount;
    this.#capacity = Math.ceil(HELD_S * rateHz);
    this.#timeS = new Float64Array(this.#capacity);
    this.#raw = new Float64Array(this.#capacity * sensorCount * CHANNELS);
    this.#present = new Uint8Array(this.#capacity * sensorCount);
  }

  /** A flag was raised, changed or ended: its onset is what counts. */
  flag({ id, sensor, startS }: Flag): void {
    if (this.#seen.has(id)) return;
    this.#seen.add(id);
    this.#wanted.push({ id, sensor, fromS: startS - BEFORE_S, toS: startS + AFTER_S });
  }

  sweep({ timeS, raw, present }: Sweep): void {
    const row = this.#sweeps++ % this.#capacity;
    this.#timeS[row] = timeS;
    this.#raw.set(raw, row * this.#sensorCount * CHANNELS);
    this.#present.set(present, row * this.#sensorCount);
    if (this.#wanted.length > 0) this.#giveUpTo(timeS);
  }

  /** The trial is over: what has come is all there is. */
  finish(): void {
    this.#giveUpTo(Number.POSITIVE_INFINITY);
  }

  #giveUpTo(timeS: number): void {
    if (!this.#wanted.some(({ toS }) => toS <= timeS)) return;
    for (const wanted of this.#wanted) if (wanted.toS <= timeS) this.#give(wanted);
    this.#wanted = this.#wanted.filter(({ toS }) => toS > timeS);
  }

  #give({ id, sensor, fromS, toS }: Wanted): void {
    const n = this.#sensorCount;
    for (let sweep = Math.max(0, this.#sweeps - this.#capacity); sweep < this.#sweeps; sweep++) {
      const row = sweep % this.#capacity;
      const timeS = this.#timeS[row]!;
      if (timeS < fromS || timeS > toS) continue;
      for (let i = sensor < 0 ? 0 : sensor; i < (sensor < 0 ? n : sensor + 1); i++) {
        this.#write(id, timeS, i, row * n + i);
      }
    }
  }

  /** @param place of the reading among those held */
  #write(id: number, timeS: number, sensor: number, place: number): void {
    this.file ??= new TableFile(this.#folder, EVIDENCE);
    const { cells } = this.file;
    cells.number(id, 0);
    cells.number(timeS, DECIMALS.time);
    cells.text(this.#names[sensor]!);
    for (const [has, part, factor] of READINGS) {
      const there = (this.#present[place]! & has) !== 0;
      for (let at = place * CHANNELS + part, end = at + 3; at < end; at++) {
        cells.number(there ? this.#raw[at]! * factor : Number.NaN, DECIMALS.reading);
      }
    }
    this.file.endRow();
  }
}
