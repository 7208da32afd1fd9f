/**
 * The body beside its drive: each sensor's yaw against the drive's, and the midline's sideways displacement against the
 * drive's sway.
 *
 *     reference packets -> track between their ticks -> the drive at each sweep's time -> comparison
 *
 * A sweep waits until the readings of the drive around it are there, a few of their intervals, and is then compared; a
 * sweep in a hole of the readings is left out.
 */
import { toAngles } from "../numeric/angles.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import type { RigFile } from "../rig/rig.ts";
import { TRUST } from "../sweep.ts";
import { Comparison } from "./comparison.ts";
import { type Loop, loopOf } from "./loop.ts";
import { ReferenceTrack } from "./reference-track.ts";
import { COMPARED_PLACES, COMPARED_STATIONS, lateralsInto, stationsInto } from "./stations.ts";

/** The drive moves when half its range is at least this. */
const LEAST_YAW = 0.5 * RAD_PER_DEG;
const LEAST_SWAY_M = 0.0005;
/** Sweeps wait at most this long for the drive's readings, s. */
const PATIENCE_S = 1;
/** Yaw and sway. */
const REFERENCES = 2;

export type ReferenceSettings = NonNullable<RigFile["reference"]>;

export interface DriveOptions {
  readonly reference: ReferenceSettings;
  /** Of the sensors. */
  readonly stations: readonly number[];
  readonly rateHz: number;
  /** Told what the drive did at each compared sweep's time: rad and m, signs and zeros put right. */
  readonly onReference?: (timeS: number, yaw: number, sway: number) => void;
}

/** A sensor or a station of the midline beside the drive, over a trial. Yaw in rad, sway in m. */
export interface Compared {
  /** Index; -1 for the midline. */
  readonly sensor: number;
  readonly station: number;
  readonly against: "yaw" | "sway";
  readonly gain: number;
  readonly lagS: number;
  readonly rmse: number;
  readonly rmseLagRemoved: number;
  readonly r2: number;
}

export class DriveComparison {
  /** Signals: the sensors' yaw, then the stations' displacement. References: yaw, then sway. */
  readonly comparison: Comparison;
  /** The sensor next to the drive. */
  readonly nearestSensor: number;
  readonly #settings: ReferenceSettings;
  readonly #stations: readonly number[];
  readonly #sensorCount: number;
  readonly #onReference: NonNullable<DriveOptions["onReference"]>;
  readonly #track = new ReferenceTrack();

  /** Sweeps that wait for the drive's readings: a ring of times and of signals. */
  readonly #waitingS: Float64Array;
  readonly #waiting: Float64Array[];
  #first = 0;
  #waitingCount = 0;

  readonly #references = new Float64Array(REFERENCES);
  readonly #angles = new Float64Array(3);
  readonly #stationPoints = new Float64Array(2 * COMPARED_STATIONS);
  /** Each sensor's last yaw, without the jump at half a turn. */
  readonly #unbrokenYaw: Float64Array;

  constructor({ reference, stations, rateHz, onReference = () => {} }: DriveOptions) {
    this.#settings = reference;
    this.#onReference = onReference;
    const sensorCount = stations.length;
    this.#stations = stations;
    this.#sensorCount = sensorCount;
    this.nearestSensor = nearest(stations, reference.station);
    this.comparison = new Comparison({
      rateHz,
      leastMotion: [LEAST_YAW, LEAST_SWAY_M],
      against: [...stations.map(() => 0), ...COMPARED_PLACES.map(() => 1)],
      chains: [
        { first: 0, count: sensorCount, nearest: this.nearestSensor },
        {
          first: sensorCount,
          count: COMPARED_STATIONS,
          nearest: sensorCount + nearest(COMPARED_PLACES, reference.station),
        },
      ],
      keepOffsets: false,
    });
    const waiting = Math.ceil(1.25 * rateHz * PATIENCE_S) + 1;
    this.#waitingS = new Float64Array(waiting);
    this.#waiting = Array.from({ length: waiting }, () => new Float64Array(sensorCount + COMPARED_STATIONS));
    this.#unbrokenYaw = new Float64Array(sensorCount);
  }

  /**
   * A reading of the drive, as it came.
   * @param timeS hub time of its tick
   * @param yaw rad; @param sway m; NaN where the drive gives none
   */
  reference(timeS: number, yaw: number, sway: number): void {
    const { yawReversed, yawZeroDeg, swayReversed, swayZeroMm, delayMs } = this.#settings;
    const turned = (yaw - yawZeroDeg * RAD_PER_DEG) * (yawReversed ? -1 : 1);
    const moved = (sway - swayZeroMm / 1000) * (swayReversed ? -1 : 1);
    if (this.#track.add(timeS - delayMs / 1000, turned, moved)) this.#release();
  }

  /**
   * A sweep's orientations and midline.
   * @param orientations 4 per sensor, body axes to earth
   * @param trust per sensor; a lost sensor's yaw is none
   * @param positions of the midline, 3 per point, m, earth axes
   * @param heading of the travel axis, rad
   */
  sweep(
    timeS: number,
    orientations: Float64Array,
    trust: Uint8Array,
    positions: Float64Array,
    heading: number,
  ): void {
    const size = this.#waitingS.length;
    if (this.#waitingCount === size) this.#drop();
    const at = (this.#first + this.#waitingCount++) % size;
    this.#waitingS[at] = timeS;
    const signals = this.#waiting[at];
    for (let i = 0; i < this.#sensorCount; i++)
      signals[i] = trust[i] === TRUST.LOST ? Number.NaN : this.#yawOf(i, orientations);
    stationsInto(this.#stationPoints, positions);
    lateralsInto(signals, this.#stationPoints, heading, this.#sensorCount);
  }

  /** The drive's yaw against a sensor's over the newest whole cycle; null while there is none. */
  loop(sensor: number): Loop | null {
    return loopOf(this.comparison, 0, REFERENCES + sensor);
  }

  /** The trial so far, sensors first. NaN where nothing could be compared. */
  trial(): Compared[] {
    const { gain, lagS, rmse, rmseLagRemoved, r2 } = this.comparison.trial.figures();
    return [...this.#stations, ...COMPARED_PLACES].map((station, i) => ({
      sensor: i < this.#sensorCount ? i : -1,
      station,
      against: i < this.#sensorCount ? "yaw" : "sway",
      gain: gain[i],
      lagS: lagS[i],
      rmse: rmse[i],
      rmseLagRemoved: rmseLagRemoved[i],
      r2: r2[i],
    }));
  }

  #yawOf(sensor: number, orientations: Float64Array): number {
    toAngles(this.#angles, orientations, 0, 4 * sensor);
    const last = this.#unbrokenYaw[sensor];
    const turns = Math.round((last - this.#angles[0]) / (2 * Math.PI));
    this.#unbrokenYaw[sensor] = this.#angles[0] + 2 * Math.PI * turns;
    return this.#unbrokenYaw[sensor];
  }

  /** Compares the sweeps whose time the track now knows. */
  #release(): void {
    const track = this.#track;
    while (this.#waitingCount > 0 && this.#waitingS[this.#first] <= track.toS) {
      const timeS = this.#waitingS[this.#first];
      if (timeS > track.fromS && !track.hole) {
        track.at(timeS);
        this.#references[0] = track.yaw;
        this.#references[1] = track.sway;
        this.#onReference(timeS, track.yaw, track.sway);
        this.comparison.push(timeS, this.#references, this.#waiting[this.#first]);
      }
      this.#drop();
    }
  }

  #drop(): void {
    this.#first = (this.#first + 1) % this.#waitingS.length;
    this.#waitingCount--;
  }
}

/** Index of the place next to `station`; of two alike the first. */
function nearest(places: readonly number[], station: number): number {
  let best = 0;
  places.forEach((place, i) => {
    if (Math.abs(place - station) < Math.abs(places[best] - station)) best = i;
  });
  return best;
}
