/**
 * Sweeps to orientations, for every sensor of the chain by itself: the online method of D. Laidig and T. Seel, "VQF:
 * Highly accurate IMU orientation estimation with bias estimation and magnetic disturbance rejection", Information
 * Fusion 91 (2023) 187-204, with true time steps and lost samples taken into account.
 *
 * Quaternions are Hamilton, scalar first, from body axes (x nose, y left, z up) to the earth (x east, y magnetic north,
 * z up).
 *
 * Lost samples. While a reading is missing, the output is predicted from the last angular rates. When readings return,
 * the missing rates are filled in between those on both sides and integrated (strapdown.ts); the low-pass filters take
 * one long step along the straight line between the readings on both sides (numeric/low-pass.ts). After `lostAfterS` without readings the orientation
 * is lost: the output stands still, and the next reading starts anew, keeping the bias and the reference field.
 */
import { setIdentity } from "../numeric/quaternion.ts";
import { CONDITION, HAS_ACCEL, HAS_GYRO, HAS_INERTIAL, HAS_MAG, type Sweep, TRUST } from "../sweep.ts";
import { Coefficients } from "./coefficients.ts";
import { estimateBias, followLevel } from "./gyro-bias.ts";
import { correctHeading, levelField, noseYaw, startHeading } from "./heading.ts";
import { composeLevel, correctInclination } from "./inclination.ts";
import { watchField } from "./magnetic-reference.ts";
import { DEFAULT_PARAMETERS, type FusionParameters } from "./parameters.ts";
import { takeReading } from "./reading.ts";
import { watchAccel, watchRate } from "./rest.ts";
import { SensorState } from "./sensor-state.ts";
import { extrapolate, integrateRate, pushRate } from "./strapdown.ts";
import { trustOf } from "./trust.ts";

export interface ChainFusionOptions {
  readonly sensorCount: number;
  /** Nominal sweeps a second. */
  readonly rateHz: number;
  /** magnetic: headings are held by the magnetometers. free: by the gyroscopes alone; magnetometers are not looked at. */
  readonly heading: "magnetic" | "free";
  /** How long after the sweep's time each sensor is sampled, s; zero if left out. */
  readonly samplingOffsetsS?: readonly number[];
  /** Rate of sensors that give a reading less often than the hub sweeps, by sensor; the hub's where left out. */
  readonly sensorRatesHz?: readonly (number | undefined)[];
  readonly parameters?: Partial<FusionParameters>;
}

export class ChainFusion {
  /** Four a sensor, body axes to earth, at the sweep's own time. Borrowed: they change with each step. */
  readonly orientations: Float64Array;
  /** TRUST codes, one a sensor. */
  readonly trust: Uint8Array;
  /** 1 where a reading was due and the orientation is predicted instead. */
  readonly bridged: Uint8Array;

  readonly #parameters: FusionParameters;
  readonly #coefficients: Coefficients;
  readonly #magnetic: boolean;
  readonly #states: readonly SensorState[];
  readonly #offsetsS: Float64Array;
  /** A sensor without a reading for longer than this has missed one, s. */
  readonly #dueAfterS: Float64Array;

  constructor(options: ChainFusionOptions) {
    const {
      sensorCount,
      rateHz,
      heading,
      samplingOffsetsS = [],
      sensorRatesHz = [],
      parameters = {},
    } = options;
    const intervalsS = Array.from({ length: sensorCount }, (_, i) => 1 / (sensorRatesHz[i] ?? rateHz));
    this.#parameters = { ...DEFAULT_PARAMETERS, ...parameters };
    this.#coefficients = new Coefficients(this.#parameters, rateHz);
    this.#magnetic = heading === "magnetic";
    this.#states = intervalsS.map((intervalS) => new SensorState(this.#parameters, intervalS));
    this.#offsetsS = Float64Array.from(intervalsS, (_, i) => samplingOffsetsS[i] ?? 0);
    this.#dueAfterS = Float64Array.from(intervalsS, (intervalS) => intervalS - 0.5 / rateHz);
    this.orientations = new Float64Array(sensorCount * 4);
    this.trust = new Uint8Array(sensorCount);
    this.bridged = new Uint8Array(sensorCount);
    this.reset();
  }

  /** Back to before the first sweep. */
  reset(): void {
    this.#states.forEach((state, sensor) => {
      state.reset(this.#parameters);
      setIdentity(this.orientations, sensor * 4);
    });
    this.trust.fill(TRUST.LOST);
    this.bridged.fill(0);
  }

  /** One sweep: reads values, presence, conditions and time; updates all orientations. */
  step(sweep: Sweep): void {
    for (let sensor = 0; sensor < this.#states.length; sensor++) {
      const state = this.#states[sensor]!;
      this.#update(state, sweep, sensor);
      this.#write(state, sweep.timeS, sensor);
    }
  }

  #update(state: SensorState, sweep: Sweep, sensor: number): void {
    const { timeS } = sweep;
    const parameters = this.#parameters;
    if (state.started && timeS - state.gyroTimeS > parameters.lostAfterS) {
      state.startYaw = noseYaw(state);
      state.loseOrientation(parameters);
    }
    const parts = takeReading(state, sweep, sensor);
    if (!(parts & HAS_GYRO)) return;
    if (sweep.conditions[sensor]! & CONDITION.GYRO_CLIPPED)
      state.clippedUntilS = timeS + parameters.clippedHoldS;
    if (!state.started) {
      if ((parts & HAS_INERTIAL) === HAS_INERTIAL) this.#start(state, timeS);
    } else {
      this.#turn(state, timeS);
      if (parts & HAS_ACCEL) this.#level(state, timeS);
      else composeLevel(state);
    }
    if (state.started && this.#magnetic && parts & HAS_MAG) {
      state.fieldFlagged = (sweep.conditions[sensor]! & CONDITION.MAG_DISTURBED) !== 0;
      this.#head(state, timeS);
    }
  }

  /** First reading: its specific force gives the inclination. */
  #start(state: SensorState, timeS: number): void {
    const gains = this.#coefficients.forStep(state.intervalS);
    state.gyroTimeS = timeS;
    state.gyroStepS = gains.stepS;
    state.accelTimeS = timeS;
    state.accelStepS = gains.stepS;
    pushRate(state);
    watchRate(state, gains, this.#parameters);
    watchAccel(state, gains, this.#parameters);
    correctInclination(state, gains);
    composeLevel(state);
    followLevel(state, gains);
    startHeading(state);
    state.started = true;
  }

  /** A new angular rate. */
  #turn(state: SensorState, timeS: number): void {
    state.gyroStepS = timeS - state.gyroTimeS;
    state.gyroTimeS = timeS;
    watchRate(state, this.#coefficients.forStep(state.gyroStepS), this.#parameters);
    integrateRate(state);
  }

  /** A new specific force. */
  #level(state: SensorState, timeS: number): void {
    state.accelStepS = timeS - state.accelTimeS;
    state.accelTimeS = timeS;
    const gains = this.#coefficients.forStep(state.accelStepS);
    watchAccel(state, gains, this.#parameters);
    correctInclination(state, gains);
    composeLevel(state);
    estimateBias(state, gains, this.#parameters, timeS >= state.clippedUntilS);
  }

  /** A new magnetic field. */
  #head(state: SensorState, timeS: number): void {
    state.magStepS = state.magSeen ? timeS - state.magTimeS : state.intervalS;
    state.magTimeS = timeS;
    state.magSeen = true;
    const gains = this.#coefficients.forStep(state.magStepS);
    levelField(state);
    watchField(state, gains, this.#parameters);
    correctHeading(state, gains, this.#parameters);
  }

  /** The output: heading on top of the level orientation, at the sweep's own time. A lost orientation stands still. */
  #write(state: SensorState, timeS: number, sensor: number): void {
    const ageS = timeS - state.gyroTimeS;
    const bridged = state.started && ageS > this.#dueAfterS[sensor]!;
    if (state.started) {
      const at = sensor * 4;
      composeEarth(state, this.orientations, at);
      const aheadS = ageS - this.#offsetsS[sensor]!;
      if (aheadS !== 0) extrapolate(state, this.orientations, at, aheadS, this.#parameters.slopeFadeS);
    }
    this.bridged[sensor] = bridged ? 1 : 0;
    this.trust[sensor] = trustOf(state, timeS, this.#magnetic, bridged, this.#parameters);
  }
}

/** out = heading · level: body axes -> earth. */
function composeEarth({ heading, level }: SensorState, out: Float64Array, at: number): void {
  const c = heading[0]!;
  const s = heading[1]!;
  out[at] = c * level[0]! - s * level[3]!;
  out[at + 1] = c * level[1]! - s * level[2]!;
  out[at + 2] = c * level[2]! + s * level[1]!;
  out[at + 3] = c * level[3]! + s * level[0]!;
}
