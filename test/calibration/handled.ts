/** Sensors handled by hand: held in poses and turned about, straight body, read with a consumer unit's noise and biases. */
import type { Procedure } from "../../bridge/calibration/procedure.ts";
import { conjugate, multiply, rotate, turnBy } from "../../bridge/numeric/quaternion.ts";
import { RAD_PER_DEG, STANDARD_GRAVITY } from "../../bridge/numeric/units.ts";
import { Random } from "../../bridge/rehearsal/random.ts";
import { NoisySensor } from "../../bridge/rehearsal/sensor-noise.ts";
import { EARTH_FIELD_UT } from "../../bridge/rehearsal/simulated-rig.ts";
import { loadConfig } from "../../bridge/rig/load.ts";
import { type SensorPlace, sensorSchema } from "../../bridge/rig/rig.ts";
import { type SensorModel, sensorModelSchema } from "../../bridge/rig/sensor-model.ts";
import { createSweep, HAS_INERTIAL, HAS_MAG } from "../../bridge/sweep.ts";

export const UNIT: SensorModel = loadConfig("sensors", "nine-axis-1000", sensorModelSchema);
export const SIX_AXIS: SensorModel = loadConfig("sensors", "six-axis-2000", sensorModelSchema);

export function place(extra: object = {}, k = 0): SensorPlace {
  return sensorSchema.parse({ name: `S${k + 1}`, station: 0.1 + 0.2 * k, model: "nine-axis-1000", ...extra });
}

/** Yaw about z, then pitch (nose up positive) about y, then roll about x, in degrees: body axes to earth. */
export function attitude(yawDeg: number, pitchDeg = 0, rollDeg = 0): Float64Array {
  const q = Float64Array.of(1, 0, 0, 0);
  for (const turn of [
    [0, 0, yawDeg],
    [0, -pitchDeg, 0],
    [rollDeg, 0, 0],
  ]) {
    turnBy(
      q,
      q,
      turn.map((angle) => angle * RAD_PER_DEG),
    );
  }
  return q;
}

/** A mounting drawn evenly from all rotations. */
export function anyMounting(random: Random) {
  return {
    yawDeg: random.between(-180, 180),
    pitchDeg: Math.asin(random.between(-1, 1)) / RAD_PER_DEG,
    rollDeg: random.between(-180, 180),
  };
}

export class Handled {
  readonly units: readonly NoisySensor[];
  readonly rateHz = 100;
  readonly orientation = attitude(0);
  readonly field: number[];
  readonly gravity: number;
  readonly #sweep;
  readonly #watched: Procedure<unknown>;
  readonly #withMag: boolean;
  #tick = 0;

  /** @param truth the sensors as they really are: mounting and calibration */
  constructor(
    truth: readonly SensorPlace[],
    watched: Procedure<unknown>,
    { seed = 1, model = UNIT, field = [...EARTH_FIELD_UT], gravity = STANDARD_GRAVITY } = {},
  ) {
    this.units = truth.map(
      (sensor, i) => new NoisySensor(model, sensor, this.rateHz, Random.forStream(seed, i)),
    );
    this.#sweep = createSweep(truth.length);
    this.#withMag = model.mag !== undefined;
    this.#watched = watched;
    this.field = field;
    this.gravity = gravity;
  }

  /** Held still. */
  hold(orientation: Float64Array, seconds: number): this {
    this.orientation.set(orientation);
    return this.turn(seconds, () => [0, 0, 0]);
  }

  /** Turned at a rate in body axes, rad/s, that changes with the time since this turn began. */
  turn(seconds: number, rate: (timeS: number) => readonly number[]): this {
    const sweep = this.#sweep;
    const back = new Float64Array(4);
    const felt = new Float64Array(9);
    for (let k = 0; k < Math.round(seconds * this.rateHz); k++) {
      const omega = rate(k / this.rateHz);
      turnBy(
        this.orientation,
        this.orientation,
        omega.map((value) => value / this.rateHz),
      );
      conjugate(back, this.orientation);
      felt.set(omega);
      rotate(felt, back, [0, 0, this.gravity], 3);
      rotate(felt, back, this.field, 6);
      this.units.forEach((unit, i) => {
        unit.read(felt, sweep.raw, 9 * i);
      });
      sweep.present.fill(this.#withMag ? HAS_INERTIAL | HAS_MAG : HAS_INERTIAL);
      sweep.timeS = this.#tick++ / this.rateHz;
      sweep.stepS = 1 / this.rateHz;
      this.#watched.observe(sweep);
    }
    return this;
  }
}

/** Angle between two mountings, degrees. */
export function between(a: Mount, b: Mount): number {
  const [qa, qb] = [quaternionOf(a), quaternionOf(b)];
  conjugate(qa, qa);
  multiply(qa, qa, qb);
  return (2 * Math.atan2(Math.hypot(qa[1]!, qa[2]!, qa[3]!), Math.abs(qa[0]!))) / RAD_PER_DEG;
}

interface Mount {
  readonly yawDeg: number;
  readonly pitchDeg: number;
  readonly rollDeg: number;
}

/** A mounting's positive pitch tips x down. */
export function quaternionOf({ yawDeg, pitchDeg, rollDeg }: Mount): Float64Array {
  return attitude(yawDeg, -pitchDeg, rollDeg);
}
