/** A rehearsed chain straight into the fusion, with the truth beside it: for minutes of swimming without hub and link. */
import { Calibration } from "../../bridge/calibration/calibration.ts";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD, RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { EARTH_FIELD_UT, SimulatedRig } from "../../bridge/rehearsal/simulated-rig.ts";
import { STEADY_SWIMMER, type SwimmerOptions } from "../../bridge/rehearsal/swimmer-options.ts";
import type { Unrest } from "../../bridge/rehearsal/unrest.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { HAS_INERTIAL, type Sweep } from "../../bridge/sweep.ts";

/** Gyroscope biases up to half a degree a second that wander, and a strong drifting field of its own at every sensor. */
export const USELESS_MAGNETOMETERS: Unrest = { gyroBiasDegPerS: 0.5, fieldUT: 60 };

export interface ChainOptions {
  readonly heading?: "magnetic" | "relative" | "free";
  readonly seed?: number;
  readonly swimmer?: Partial<SwimmerOptions>;
  readonly unrest?: Unrest;
  readonly meanBendDeg?: number;
  readonly withMag?: boolean;
}

export class RehearsedChain {
  readonly fusion: ChainFusion;
  readonly gaps: number;
  timeS = 0;
  readonly #rig = loadRig("ribbon-foil");
  readonly #simulated: SimulatedRig;
  readonly #calibration: Calibration;
  readonly #withMag: boolean;
  #count = 0;

  constructor(options: ChainOptions) {
    const { heading = "relative", seed = 1, swimmer = {}, unrest, meanBendDeg = 0, withMag = true } = options;
    const { sensors, body, hub } = this.#rig;
    this.gaps = sensors.length - 1;
    this.#withMag = withMag;
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
      spoil(sweep);
      this.#calibration.apply(sweep);
      this.fusion.step(sweep);
      each();
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

/** Root mean square. */
export const rms = (values: readonly number[]) =>
  Math.sqrt(values.reduce((sum, value) => sum + value * value, 0) / values.length);

export function yawOf(q: ArrayLike<number>, sensor: number): number {
  const [w, x, y, z] = [0, 1, 2, 3].map((i) => q[4 * sensor + i]!) as [number, number, number, number];
  return Math.atan2(2 * (x * y + w * z), 1 - 2 * (y * y + z * z));
}

export const wrapped = (angle: number) => Math.atan2(Math.sin(angle), Math.cos(angle));
