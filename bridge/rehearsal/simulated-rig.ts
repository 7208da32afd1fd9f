/**
 * The simulated rig up to the hub's memory: what every sensor reads in each sweep, faults included, and the truth beside
 * it.
 */
import { conjugate, rotate } from "../numeric/quaternion.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import type { Rig } from "../rig/load.ts";
import { ACCEL, CHANNELS, createSweep, GYRO, HAS_INERTIAL, HAS_MAG, MAG, type Sweep } from "../sweep.ts";
import type { PlaneMotion, WavePlace } from "./body-wave.ts";
import { DELIVERY, type FaultEffect } from "./effect.ts";
import { effectOf } from "./fault-effects.ts";
import type { Fault } from "./faults.ts";
import { Random } from "./random.ts";
import { NoisySensor } from "./sensor-noise.ts";
import { newJet } from "./signal.ts";
import { newKinematics, Swimmer } from "./swimmer.ts";
import type { SwimmerOptions } from "./swimmer-options.ts";
import { type Unrest, unrestOf } from "./unrest.ts";

/** Points of the true midline: as many as the display's. */
export const TRUTH_POINTS = 41;

/** Read status a hub gives for a unit that does not answer. */
const NO_ANSWER = 1;
/** Steps a second in which a sensor's peak rate is looked for; far more than any body beats. */
const PEAK_LOOKS_HZ = 200;

/** 50 µT dipping 69 deg to magnetic north: the field at the site of the rigs in config, rounded. µT, earth axes. */
export const EARTH_FIELD_UT: readonly number[] = [
  0,
  50 * Math.cos(69 * RAD_PER_DEG),
  -50 * Math.sin(69 * RAD_PER_DEG),
];

/** What really happened at one moment. */
export interface Truth {
  /** 3 per point, m, earth axes, nose at the origin; TRUTH_POINTS evenly spaced points. */
  readonly midline: Float64Array;
  /** m, earth axes, from the point of the travel axis abreast of the nose. */
  readonly nose: Float64Array;
  /** 4 per sensor: the body's orientation at the sensor's station, body axes to earth. */
  readonly orientations: Float64Array;
}

export interface SimulatedRigOptions {
  readonly rig: Rig;
  readonly seed: number;
  readonly faults: readonly Fault[];
  readonly swimmer: SwimmerOptions;
  /** µT, earth axes. */
  readonly earthFieldUT: readonly number[];
  /** None unless given. */
  readonly unrest?: Unrest | undefined;
}

export class SimulatedRig {
  readonly swimmer: Swimmer;
  /** Every fault's effect, in the order given. */
  readonly effects: readonly FaultEffect[];

  readonly #rig: Rig;
  readonly #sensors: readonly NoisySensor[];
  readonly #places: readonly WavePlace[];
  readonly #truthPlaces: readonly WavePlace[];
  /** Effects on each sensor. */
  readonly #effectsOn: readonly (readonly FaultEffect[])[];
  /** Sensors whose plug may be exchanged with the next one's. */
  readonly #swaps: readonly { readonly sensor: number; readonly effect: FaultEffect }[];
  readonly #earthFieldUT: readonly number[];

  readonly #sweep: Sweep;
  readonly #kinematics = newKinematics();
  readonly #drivenPlace: WavePlace;
  readonly #drivenMotion: PlaneMotion = { behind: newJet(), lateral: newJet(), angle: newJet() };
  readonly #felt = new Float64Array(CHANNELS);
  readonly #field = new Float64Array(3);
  readonly #toBody = new Float64Array(4);

  constructor({ rig, seed, faults, swimmer, earthFieldUT, unrest }: SimulatedRigOptions) {
    this.#rig = rig;
    this.swimmer = new Swimmer(rig.body.lengthMm / 1000, swimmer);
    this.#earthFieldUT = earthFieldUT;
    this.#sweep = createSweep(rig.sensors.length);
    this.#places = rig.sensors.map((sensor) => this.swimmer.place(sensor.station));
    this.#drivenPlace = this.swimmer.place(rig.reference?.station ?? 0);
    this.#truthPlaces = Array.from({ length: TRUTH_POINTS }, (_, i) =>
      this.swimmer.place(i / (TRUTH_POINTS - 1)),
    );
    const sensors = rig.sensors.map(
      (place, i) => new NoisySensor(rig.models[i], place, rig.hub.rateHz, Random.forStream(seed, i)),
    );
    this.#sensors = sensors;
    // Streams past the sensors' own: one a fault.
    this.effects = faults.map((fault, i) =>
      effectOf(fault, {
        random: Random.forStream(seed, sensors.length + i),
        sensors,
        peakRate: (sensor, fromS, toS) => this.#peakRate(sensor, fromS, toS),
      }),
    );
    this.#swaps = this.effects.flatMap((effect, i) =>
      effect.isSwapped ? [{ sensor: faults[i].sensor, effect }] : [],
    );
    this.#effectsOn = sensors.map((_, sensor) => {
      const own = this.effects.filter((effect, i) => {
        const behind = sensor - faults[i].sensor;
        return faults[i].sensor >= 0 && behind >= 0 && behind < (effect.units ?? 1);
      });
      if (unrest === undefined) return own;
      return [...own, unrestOf(unrest, Random.forStream(seed, sensors.length + faults.length + sensor))];
    });
  }

  /** Per sensor: rad/s, m/s² and µT for one count. */
  get scales(): { gyroScale: number; accelScale: number; magScale: number }[] {
    return this.#sensors.map(({ gyro, accel, mag }) => ({
      gyroScale: gyro.scale,
      accelScale: accel.scale,
      magScale: mag?.scale ?? 0,
    }));
  }

  /**
   * Sweep number `index`: raw, present and readStatus filled in. Borrowed: rewritten by the next call.
   * Call in order of time, every sweep once.
   */
  sweep(index: number): Sweep {
    const timeS = index / this.#rig.hub.rateHz;
    for (let sensor = 0; sensor < this.#sensors.length; sensor++) this.#read(sensor, index, timeS);
    for (const { sensor, effect } of this.#swaps) if (effect.isSwapped?.(timeS)) this.#exchange(sensor);
    return this.#sweep;
  }

  /** The drive, at its place along the body: yaw, rad, and sway, m, against the travel axis. */
  driveAt(timeS: number): { yaw: number; sway: number } {
    this.swimmer.planeMotion(timeS, this.#drivenPlace, this.#drivenMotion);
    return { yaw: this.#drivenMotion.angle.value, sway: this.#drivenMotion.lateral.value };
  }

  /** What really happens `timeS` after the start. */
  truthAt(timeS: number): Truth {
    const midline = new Float64Array(3 * TRUTH_POINTS);
    this.swimmer.midline(timeS, this.#truthPlaces, midline);
    this.swimmer.kinematics(timeS, this.#truthPlaces[0], this.#kinematics);
    const nose = this.#kinematics.position.slice();
    const orientations = new Float64Array(4 * this.#places.length);
    this.#places.forEach((place, i) => {
      this.swimmer.kinematics(timeS, place, this.#kinematics);
      orientations.set(this.#kinematics.orientation, 4 * i);
    });
    return { midline, nose, orientations };
  }

  #read(sensor: number, index: number, sweepS: number): void {
    const sweep = this.#sweep;
    const place = this.#rig.sensors[sensor];
    const timeS = sweepS + place.samplingOffsetUs * 1e-6 - this.#rig.models[sensor].delayMs * 1e-3;
    this.#feel(timeS, sensor);
    const at = sensor * CHANNELS;
    this.#sensors[sensor].read(this.#felt, sweep.raw, at);
    let delivery: number = DELIVERY.WHOLE;
    for (const effect of this.#effectsOn[sensor]) {
      effect.spoil?.(timeS, sweep.raw, at);
      delivery = Math.max(delivery, effect.delivery?.(timeS) ?? DELIVERY.WHOLE);
    }
    sweep.readStatus[sensor] = delivery === DELIVERY.UNREADABLE ? NO_ANSWER : 0;
    sweep.present[sensor] = delivery === DELIVERY.WHOLE ? this.#dueParts(sensor, index) : 0;
  }

  /** Exchanges what came from sensor `i` with what came from the next. */
  #exchange(i: number): void {
    const { raw, present, readStatus } = this.#sweep;
    for (const [slots, width] of [
      [raw, CHANNELS],
      [present, 1],
      [readStatus, 1],
    ] as const) {
      for (let at = i * width; at < (i + 1) * width; at++) {
        const kept = slots[at];
        slots[at] = slots[at + width];
        slots[at + width] = kept;
      }
    }
  }

  /** Leaves in #felt what an ideal unit would read, body axes. */
  #feel(timeS: number, sensor: number): void {
    const felt = this.#felt;
    const field = this.#field;
    this.swimmer.kinematics(timeS, this.#places[sensor], this.#kinematics);
    felt.set(this.#kinematics.angularVelocity, GYRO);
    felt.set(this.#kinematics.specificForce, ACCEL);
    field.set(this.#earthFieldUT);
    for (const effect of this.effects) effect.addField?.(timeS, field);
    conjugate(this.#toBody, this.#kinematics.orientation);
    rotate(felt, this.#toBody, field, MAG);
    for (const effect of this.#effectsOn[sensor]) effect.disturb?.(timeS, felt);
  }

  /** Presence bits of the parts that have a new reading in this sweep. */
  #dueParts(sensor: number, index: number): number {
    const { rateHz } = this.#rig.sensors[sensor];
    if (!this.#isDue(index, rateHz)) return 0;
    const mag = this.#rig.models[sensor].mag;
    return mag !== undefined && this.#isDue(index, mag.rateHz) ? HAS_INERTIAL | HAS_MAG : HAS_INERTIAL;
  }

  /** Whether a part with a rate of its own has had a new reading since the sweep before. */
  #isDue(index: number, rateHz: number | undefined): boolean {
    const perSweep = (rateHz ?? this.#rig.hub.rateHz) / this.#rig.hub.rateHz;
    return perSweep >= 1 || index === 0 || Math.floor(index * perSweep) > Math.floor((index - 1) * perSweep);
  }

  #peakRate(sensor: number, fromS: number, toS: number): number {
    let peak = 0;
    for (let i = 0; i <= (toS - fromS) * PEAK_LOOKS_HZ; i++) {
      this.swimmer.kinematics(fromS + i / PEAK_LOOKS_HZ, this.#places[sensor], this.#kinematics);
      for (const rate of this.#kinematics.angularVelocity) peak = Math.max(peak, Math.abs(rate));
    }
    return peak;
  }
}
