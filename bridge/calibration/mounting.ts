/**
 * Finds how each sensor is mounted, from poses and movements of the whole body.
 *
 * What each thing shows of a sensor's rotation against the body:
 *
 *     a still straight pose       which way is up: two angles; not the turn about the vertical
 *     a second still pose         on its side, or nose up: all three, as well as the accelerometers are calibrated
 *     the nose's compass bearing  the turn about the vertical, as well as the field is the Earth's
 *     a bend from side to side    the body's z axis from the gyroscope, free of the accelerometer's bias; and the turn about
 *                                 it from how neighbours' accelerations differ (bend.ts): all three angles
 *
 * Where one sensor moves too little to be seen in a bend, the field in the straight pose, as its neighbours see it, tells
 * its turn about the vertical to some degrees.
 */
import { DEG_PER_RAD, RAD_PER_DEG, STANDARD_GRAVITY } from "../numeric/units.ts";
import type { SensorPlace } from "../rig/rig.ts";
import type { SensorModel } from "../rig/sensor-model.ts";
import { ACCEL, CHANNELS, GYRO, HAS_INERTIAL, MAG, type Sweep } from "../sweep.ts";
import { type AttitudeFit, cross, dot, fitAttitude, type Sighting, turned, unit } from "./attitude-fit.ts";
import { type BendAxis, bendAxis, type Facing, facings } from "./bend.ts";
import { type BodyPose, describePose, eastOf, upOf } from "./body-pose.ts";
import { Calibration, mountingAngles } from "./calibration.ts";
import { type Outcome, type Procedure, type Progress, refused } from "./procedure.ts";
import { StillMeter } from "./still.ts";

export interface MountingOptions {
  readonly sensors: readonly SensorPlace[];
  readonly models: readonly SensorModel[];
  readonly rateHz: number;
  readonly lengthM: number;
  /** Still straight poses, in this order; the first is followed by the bend. */
  readonly poses: readonly BodyPose[];
  /** Whether the body is bent from side to side after the last pose. */
  readonly bend: boolean;
  /** Compass bearing of the nose in the first pose, rad clockwise from magnetic north; null if not known. */
  readonly bearing: number | null;
  /** Standard deviation of each accelerometer's bias, m/s²; null, or all left out: as its model's data sheet allows. */
  readonly accelBiases?: readonly (number | null)[];
}

export interface MountingNumbers {
  readonly yawDeg: number;
  readonly pitchDeg: number;
  readonly rollDeg: number;
  /** Figure of merit: standard deviation of the least known turn, °. */
  readonly sigmaDeg: number;
}

const STILL_S = 3;
const BEND_S = 12;
const LONGEST_RECORD_S = 60;
/** The body is being bent while half of its sensors turn faster than this, rad/s. */
const BENDING = 0.15;
/** A new pose is this far from all before, rad. */
const NEW_POSE = 25 * RAD_PER_DEG;
/** How well a body is held as was said, and lies straight; how well a compass bearing is known; how even the field is. rad. */
const HELD = 0.2 * RAD_PER_DEG;
const BEARING = 2 * RAD_PER_DEG;
const FIELD_EVEN = 3 * RAD_PER_DEG;
/** What a gyroscope's axes are off square at best, rad. */
const GYRO_SQUARE = 0.1 * RAD_PER_DEG;
/** Facing is taken from what moved by at least this, m/s² RMS, and is not believed beyond this sigma, rad. */
const MOVED = 0.1;
const FACING_USABLE = 10 * RAD_PER_DEG;
/** A bend whose axis wanders by more is none in one plane, rad. */
const PLANE = 5 * RAD_PER_DEG;
/** A result worse than this is none. */
const ACCEPTED = 5 * RAD_PER_DEG;
/** The body's z must be nearer to the vertical than this for a bend to be told from its mirror image, as a cosine. */
const UPRIGHT = 0.5;

const Z = [0, 0, 1] as const;

/** Means of one still pose, sensors x CHANNELS. */
interface SeenPose {
  readonly pose: BodyPose;
  readonly mean: Float64Array;
}

export class Mounting implements Procedure<MountingNumbers> {
  readonly #options: MountingOptions;
  readonly #own: Calibration;
  readonly #still: StillMeter;
  readonly #poses: SeenPose[] = [];
  readonly #record: { sensorCount: number; count: number; stepS: Float64Array; readings: Float64Array };
  #bentS = 0;
  #recordFull = false;

  constructor(options: MountingOptions) {
    const { sensors, models, rateHz, bend } = options;
    this.#options = options;
    // Everything but the mounting: that is what is looked for.
    const bare = { yawDeg: 0, pitchDeg: 0, rollDeg: 0 };
    this.#own = new Calibration(sensors.map((sensor) => ({ ...sensor, mounting: bare })));
    this.#still = new StillMeter(
      sensors.map(({ rateHz: own }, i) => ({ model: models[i]!, rateHz: own })),
      rateHz,
    );
    const rows = bend ? Math.ceil(LONGEST_RECORD_S * rateHz) : 0;
    this.#record = {
      sensorCount: sensors.length,
      count: 0,
      stepS: new Float64Array(rows),
      readings: new Float64Array(rows * sensors.length * 6),
    };
  }

  observe(sweep: Sweep): void {
    this.#own.apply(sweep);
    if (this.#poses.length < this.#options.poses.length) {
      this.#still.observe(sweep, sweep.values);
      if (this.#still.stillS.every((stillS) => stillS >= STILL_S)) this.#takePose();
    } else if (this.#options.bend && this.#bentS < BEND_S) this.#keep(sweep);
  }

  progress(): Progress {
    const { poses, bend } = this.#options;
    const steps = poses.length + (bend ? 1 : 0);
    const seen = this.#poses.length;
    if (seen < poses.length) {
      const stillS = this.#still.stillS.reduce((least, s) => Math.min(least, s), STILL_S);
      return {
        share: (seen + stillS / STILL_S) / steps,
        text: `Hold the body straight, still and ${describePose(poses[seen]!)}.`,
      };
    }
    if (bend && this.#bentS < BEND_S && !this.#recordFull) {
      const text = "Now bend the body from side to side, evenly, all of it, until this is full.";
      return { share: (seen + this.#bentS / BEND_S) / steps, text };
    }
    return { share: 1, text: "Done." };
  }

  result(): readonly Outcome<MountingNumbers>[] {
    const { sensors, poses } = this.#options;
    if (this.#poses.length < poses.length) {
      const missing = poses.slice(this.#poses.length).map(describePose).join("; ");
      return sensors.map(() => refused(`never still for ${STILL_S} s as asked: ${missing}`));
    }
    const sightings = sensors.map((_, i) => this.#sightings(i));
    const record = this.#record;
    const bent = this.#bentS >= BEND_S / 2;
    const axes = bent ? sensors.map((_, i) => bendAxis(record, i)) : [];
    axes.forEach((axis, i) => {
      const seen = this.#axisSighting(axis, i);
      if (seen !== null) sightings[i]!.push(seen);
    });
    const faced = bent && sensors.length > 1 ? this.#facings(sightings) : null;
    faced?.forEach((facing, i) => {
      if (facing !== null) sightings[i]!.push(facing);
    });
    this.#shareField(sightings);
    return sensors.map((_, i) => this.#outcome(sightings[i]!, axes[i]));
  }

  #takePose(): void {
    const { mean } = this.#still;
    const isNew = this.#poses.every((seen) => {
      const turns = this.#options.sensors.map((_, i) => {
        const [a, b] = [forceOf(seen.mean, i), forceOf(mean, i)];
        return Math.acos(Math.min(1, dot(unit(a), unit(b))));
      });
      return turns.every((turn) => turn > NEW_POSE);
    });
    if (!isNew) return;
    this.#poses.push({ pose: this.#options.poses[this.#poses.length]!, mean: mean.slice() });
  }

  #keep(sweep: Sweep): void {
    const record = this.#record;
    const { sensorCount } = record;
    if (record.count === record.stepS.length) {
      this.#recordFull = true;
      return;
    }
    const rest = this.#poses.at(-1)!.mean;
    record.stepS[record.count] = sweep.stepS;
    let turning = 0;
    for (let i = 0; i < sensorCount; i++) {
      const from = i * CHANNELS;
      const to = (record.count * sensorCount + i) * 6;
      let square = 0;
      for (let k = 0; k < 3; k++) {
        const rate = sweep.values[from + GYRO + k]! - rest[from + GYRO + k]!;
        record.readings[to + k] = rate;
        record.readings[to + 3 + k] = sweep.values[from + ACCEL + k]!;
        square += rate * rate;
      }
      if (square > BENDING * BENDING && (sweep.present[i]! & HAS_INERTIAL) === HAS_INERTIAL) turning++;
    }
    record.count++;
    if (2 * turning >= sensorCount) this.#bentS += sweep.stepS;
  }

  /** Up in every pose, and the field's direction in the first where the nose's bearing is known. */
  #sightings(i: number): Sighting[] {
    const { bearing } = this.#options;
    const sigma = Math.hypot(this.#accelBias(i) / STANDARD_GRAVITY, HELD);
    const seen: Sighting[] = this.#poses.map(({ pose, mean }) => ({
      sensor: forceOf(mean, i),
      body: upOf(pose),
      sigma,
    }));
    const east = bearing === null ? null : this.#eastAt(i);
    if (east !== null) {
      const up = upOf(this.#poses[0]!.pose);
      seen.push({ sensor: east, body: eastOf(this.#poses[0]!.pose, bearing!), sigma: BEARING, about: up });
    }
    return seen;
  }

  #accelBias(i: number): number {
    // A uniform spread of the data sheet's width has this standard deviation.
    const ofSheet = (this.#options.models[i]!.accel.biasMilliG * STANDARD_GRAVITY) / 1000 / Math.sqrt(3);
    return this.#options.accelBiases?.[i] ?? ofSheet;
  }

  /** Magnetic east in the first pose, sensor axes; null without magnetometer. */
  #eastAt(i: number): Float64Array | null {
    const { mean } = this.#poses[0]!;
    const at = i * CHANNELS + MAG;
    const field = mean.subarray(at, at + 3);
    if (this.#options.models[i]!.mag === undefined || Math.hypot(...field) === 0) return null;
    return unit(cross(field, forceOf(mean, i)));
  }

  #axisSighting({ axis, sigma, rate }: BendAxis, i: number): Sighting | null {
    const { pose, mean } = this.#poses.at(-1)!;
    const upright = upOf(pose)[2]!;
    if (rate < BENDING || sigma > PLANE || Math.abs(upright) < UPRIGHT) return null;
    const sense = Math.sign(dot(axis, forceOf(mean, i)) * upright);
    return { sensor: axis.map((v) => sense * v), body: Z, sigma: Math.hypot(sigma, GYRO_SQUARE) };
  }

  /** Which way each sensor faces about the body's z axis; null where it moved too little to tell. */
  #facings(sightings: readonly (readonly Sighting[])[]): (Sighting | null)[] {
    const { sensors, lengthM } = this.#options;
    const { pose, mean } = this.#poses.at(-1)!;
    if (Math.abs(upOf(pose)[2]!) < UPRIGHT) return sensors.map(() => null);
    const fits = sightings.map(fitAttitude);
    const levelled = fits.map((fit, i) => {
      const still = forceOf(mean, i);
      const inverse = conjugated(fit.rotation);
      const gravity = turned(inverse, upOf(pose)).map((v) => v * Math.hypot(...still));
      return { rotation: fit.rotation, still, bias: still.map((v, k) => v - gravity[k]!) };
    });
    const gaps = sensors.slice(1).map((sensor, g) => (sensor.station - sensors[g]!.station) * lengthM);
    return facings(this.#record, levelled, gaps).map((facing, i) => {
      const tilt = Math.sqrt(Math.max(fits[i]!.covariance[0]!, fits[i]!.covariance[4]!));
      return this.#facingSighting(facing, fits[i]!, tilt);
    });
  }

  #facingSighting({ angle, sigma, perBias, moved }: Facing, fit: AttitudeFit, tilt: number): Sighting | null {
    const whole = Math.hypot(sigma, perBias * STANDARD_GRAVITY * tilt, HELD);
    if (moved < MOVED || !(whole < FACING_USABLE)) return null;
    // The levelled frame's x axis faces `angle` to the left of the nose.
    const x = turned(conjugated(fit.rotation), [1, 0, 0]);
    return { sensor: x, body: [Math.cos(angle), Math.sin(angle), 0], sigma: whole, about: Z };
  }

  /** Sensors whose turn about the vertical is known tell the field; it then helps those where it is not. */
  #shareField(sightings: Sighting[][]): void {
    const up = upOf(this.#poses[0]!.pose);
    const easts = sightings.map((_, i) => this.#eastAt(i));
    const known = new Float64Array(3);
    sightings.forEach((seen, i) => {
      const fit = fitAttitude(seen);
      if (easts[i] === null || fit.sigma > FIELD_EVEN) return;
      turned(fit.rotation, easts[i]!).forEach((v, k) => {
        known[k]! += v;
      });
    });
    if (Math.hypot(...known) === 0) return;
    const east = unit(known);
    sightings.forEach((seen, i) => {
      if (easts[i] === null || fitAttitude(seen).sigma <= FIELD_EVEN) return;
      seen.push({ sensor: easts[i]!, body: east, sigma: FIELD_EVEN, about: up });
    });
  }

  #outcome(sightings: readonly Sighting[], axis: BendAxis | undefined): Outcome<MountingNumbers> {
    const fit = fitAttitude(sightings);
    if (fit.sigma > ACCEPTED) return refused(this.#whyUnseen(fit, axis));
    const warnings: string[] = [];
    const limit = fit.sigma * DEG_PER_RAD;
    if (limit > 0.5) {
      warnings.push(
        `known to ${limit.toFixed(1)}° only: calibrate the accelerometer in six positions first, or bend the body more`,
      );
    }
    return { ok: true, numbers: { ...mountingAngles(fit.rotation), sigmaDeg: limit }, warnings };
  }

  #whyUnseen({ sigma, worst }: AttitudeFit, axis: BendAxis | undefined): string {
    const vertical = Math.abs(dot(worst, upOf(this.#poses[0]!.pose)));
    const turn = vertical > 0.9 ? "its turn about the vertical" : "its rotation";
    const known = sigma > 1 ? "cannot be seen" : `is known to ${Math.round(sigma * DEG_PER_RAD)}° only`;
    if (!this.#options.bend) {
      return `${turn} ${known} from this: bend the body from side to side, give the nose's compass bearing, or add a pose on its side`;
    }
    if (axis === undefined) return `${turn} ${known}: the body was not bent`;
    if (axis.rate < BENDING) return `${turn} ${known}: this sensor hardly turned; bend the body here too`;
    if (axis.sigma > PLANE) return `${turn} ${known}: the body was not bent in one plane`;
    return `${turn} ${known}: bend the body faster and further, and hold it level`;
  }
}

function conjugated(q: Float64Array): Float64Array {
  return Float64Array.of(q[0]!, -q[1]!, -q[2]!, -q[3]!);
}

function forceOf(mean: Float64Array, i: number): Float64Array {
  return mean.slice(i * CHANNELS + ACCEL, i * CHANNELS + ACCEL + 3);
}
