/** A rehearsed chain straight into the fusion, with the truth beside it: for minutes of swimming without hub and link. */
import { Calibration } from "../../bridge/calibration/calibration.ts";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD, RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { EARTH_FIELD_UT, SimulatedRig } from "../../bridge/rehearsal/simulated-rig.ts";
import { STEADY_SWIMMER, type SwimmerOptions } from "../../bridge/rehearsal/swimmer-options.ts";
import type { Unrest } from "../../bridge/rehearsal/unrest.ts";
import { loadRig, type Rig } from "../../bridge/rig/load.ts";
import { HAS_INERTIAL, type Sweep } from "../../bridge/sweep.ts";
import { headingError, inclinationError } from "./motion.ts";

/** Gyroscope biases up to half a degree a second that wander, and a strong drifting field of its own at every sensor. */
export const USELESS_MAGNETOMETERS: Unrest = { gyroBiasDegPerS: 0.5, fieldUT: 60 };

export interface ChainOptions {
  readonly heading?: "magnetic" | "relative" | "free";
  readonly seed?: number;
  readonly swimmer?: Partial<SwimmerOptions>;
  readonly unrest?: Unrest;
  readonly meanBendDeg?: number;
  readonly withMag?: boolean;
  /** The gyroscopes are cut off at plus and minus this, rad/s. */
  readonly gyroRange?: number;
  /** Whether the fusion is told that range. */
  readonly rangeKnown?: boolean;
  /** Largest bias of the accelerometers; the model's where left out. */
  readonly accelBiasMilliG?: number;
}

/** Errors of one sensor, rad. */
export interface SensorErrors {
  readonly heading: number;
  readonly inclination: number;
}

export class RehearsedChain {
  readonly fusion: ChainFusion;
  readonly gaps: number;
  timeS = 0;
  readonly #rig: Rig;
  readonly #simulated: SimulatedRig;
  readonly #calibration: Calibration;
  readonly #withMag: boolean;
  readonly #gyroRange: number;
  readonly #clipped = new Uint8Array(6);
  #count = 0;

  constructor(options: ChainOptions) {
    const { heading = "relative", seed = 1, swimmer = {}, unrest, meanBendDeg = 0, withMag = true } = options;
    const { gyroRange = Infinity, rangeKnown = true } = options;
    this.#rig = withAccelBias(loadRig("ribbon-foil"), options.accelBiasMilliG);
    const { sensors, body, hub } = this.#rig;
    this.gaps = sensors.length - 1;
    this.#withMag = withMag;
    this.#gyroRange = gyroRange;
    this.#simulated = new SimulatedRig({
      rig: this.#rig,
      seed,
      faults: [],
      swimmer: { ...STEADY_SWIMMER, ...swimmer },
      earthFieldUT: EARTH_FIELD_UT,
      unrest,
    });
    this.#calibration = new Calibration(sensors);
    this.fusion = new ChainFusion({
      sensorCount: sensors.length,
      rateHz: hub.rateHz,
      heading,
      body: {
        stations: sensors.map((sensor) => sensor.station),
        lengthM: body.lengthMm / 1000,
        meanBend: meanBendDeg * RAD_PER_DEG,
      },
      gyroRanges: sensors.map(() => (rangeKnown ? gyroRange : Infinity)),
      // The turn made of a reading ends half an interval after it, as in pipeline.ts. Clipped stretches are looked at there.
      samplingOffsetsS: sensors.map(() => (gyroRange === Infinity ? 0.5 / hub.rateHz : 0)),
    });
  }

  /** Swims on to `untilS`. @param each called after every sweep */
  swim(untilS: number, each: () => void = () => {}, spoil: (sweep: Sweep) => void = () => {}): void {
    const { rateHz } = this.#rig.hub;
    for (; this.#count < untilS * rateHz; this.#count++) {
      const sweep = this.#simulated.sweep(this.#count);
      this.timeS = this.#count / rateHz;
      sweep.timeS = this.timeS;
      sweep.stepS = 1 / rateHz;
      sweep.conditions.fill(0);
      if (!this.#withMag) for (let i = 0; i < sweep.sensorCount; i++) sweep.present[i]! &= HAS_INERTIAL;
      this.#clip(sweep);
      spoil(sweep);
      this.#calibration.apply(sweep);
      this.fusion.step(sweep);
      each();
    }
  }

  /** Error of a sensor's orientation. Readings are taken for means, so the turn leads by half a step. */
  errorOf(sensor: number): SensorErrors {
    const truth = this.#simulated.truthAt(this.timeS + 0.5 / this.#rig.hub.rateHz).orientations;
    const quaternion = [...truth.subarray(4 * sensor, 4 * sensor + 4)];
    return {
      heading: headingError(this.fusion, quaternion, sensor),
      inclination: inclinationError(this.fusion, quaternion, sensor),
    };
  }

  /** Is any axis of the sensor at the end of its range in the newest sweep? */
  isClipped(sensor: number): boolean {
    return this.#clipped[sensor] === 1;
  }

  #clip(sweep: Sweep): void {
    const range = this.#gyroRange;
    for (let sensor = 0; sensor < sweep.sensorCount; sensor++) {
      this.#clipped[sensor] = 0;
      for (let axis = 9 * sensor; axis < 9 * sensor + 3; axis++) {
        if (Math.abs(sweep.raw[axis]!) < range) continue;
        sweep.raw[axis] = range * Math.sign(sweep.raw[axis]!);
        this.#clipped[sensor] = 1;
      }
    }
  }

  /** Swims for `seconds` and measures. @returns RMS error of the heading between neighbours, degrees, by gap */
  relativeErrors(seconds: number): number[] {
    const squares = new Array<number>(this.gaps).fill(0);
    let count = 0;
    this.swim(this.timeS + seconds, () => {
      this.errorsNow().forEach((error, gap) => {
        squares[gap]! += error * error;
      });
      count++;
    });
    return squares.map((sum) => Math.sqrt(sum / count));
  }

  /** Error of the heading between neighbours, degrees, by gap. */
  errorsNow(): number[] {
    const truth = this.#simulated.truthAt(this.timeS).orientations;
    const errors = Array.from(
      { length: this.gaps + 1 },
      (_, i) => yawOf(this.fusion.orientations, i) - yawOf(truth, i),
    );
    return Array.from(
      { length: this.gaps },
      (_, gap) => DEG_PER_RAD * wrapped(errors[gap + 1]! - errors[gap]!),
    );
  }
}

function withAccelBias(rig: Rig, biasMilliG: number | undefined): Rig {
  if (biasMilliG === undefined) return rig;
  return { ...rig, models: rig.models.map((model) => ({ ...model, accel: { ...model.accel, biasMilliG } })) };
}

/** Root mean square. */
export const rms = (values: readonly number[]) =>
  Math.sqrt(values.reduce((sum, value) => sum + value * value, 0) / values.length);

export function yawOf(q: ArrayLike<number>, sensor: number): number {
  const [w, x, y, z] = [0, 1, 2, 3].map((i) => q[4 * sensor + i]!) as [number, number, number, number];
  return Math.atan2(2 * (x * y + w * z), 1 - 2 * (y * y + z * z));
}

export const wrapped = (angle: number) => Math.atan2(Math.sin(angle), Math.cos(angle));
