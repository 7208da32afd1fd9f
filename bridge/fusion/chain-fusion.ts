/**
 * Sweeps to orientations, for every sensor of the chain by itself: the online method of D. Laidig and T. Seel, "VQF:
 * Highly accurate IMU orientation estimation with bias estimation and magnetic disturbance rejection", Information
 * Fusion 91 (2023) 187-204, with true time steps, and lost samples and clipped rates made good.
 *
 * Quaternions are Hamilton, scalar first, from body axes (x nose, y left, z up) to the earth (x east, y magnetic north,
 * z up).
 *
 * Lost samples. While a reading is missing, the output is predicted from the last angular rates. When readings return,
 * the missing rates are filled in between those on both sides and integrated (gap.ts); the low-pass filters take one long
 * step along the straight line between the readings on both sides (numeric/low-pass.ts). After `lostAfterS` without
 * readings the orientation is lost: the output stands still, and the next reading starts anew, keeping the bias and the
 * reference field.
 *
 * Clipped rates. What an axis turned beyond its range is estimated and put in where it belongs (clipping.ts). How
 * uncertain that and all else leaves inclination and heading is stated (uncertainty.ts).
 */
import { setIdentity } from "../numeric/quaternion.ts";
import type { HeadingSource } from "../rig/rig.ts";
import { CONDITION, HAS_ACCEL, HAS_GYRO, HAS_INERTIAL, HAS_MAG, type Sweep, TRUST } from "../sweep.ts";
import { clippedAxes, keepField, settleStretch } from "./clipping.ts";
import { Coefficients } from "./coefficients.ts";
import { settleGap } from "./gap.ts";
import { estimateBias } from "./gyro-bias.ts";
import {
  composeEarth,
  correctHeading,
  keepHeading,
  levelField,
  noseYaw,
  startHeading,
  sumField,
  turnHeading,
  yawOf,
} from "./heading.ts";
import { averageForce, composeLevel, correctInclination } from "./inclination.ts";
import { watchField } from "./magnetic-reference.ts";
import { OnBoard } from "./on-board.ts";
import { DEFAULT_PARAMETERS, type FusionParameters } from "./parameters.ts";
import { takeReading } from "./reading.ts";
import { createRecord, loseOrientation, resetRecord, Slot } from "./record.ts";
import { type ChainBody, RelativeHeading } from "./relative-heading.ts";
import { watchRest } from "./rest.ts";
import { carryToEnd, extrapolate, integrateRate, takeRate } from "./strapdown.ts";
import { magneticTrust, trustOf } from "./trust.ts";
import { headingSigma, inclinationSigma, isRecovered, narrowInclination } from "./uncertainty.ts";

export interface ChainFusionOptions {
  readonly sensorCount: number;
  /** Nominal sweeps a second. */
  readonly rateHz: number;
  /**
   * What holds the headings at first. magnetic: the magnetometers. relative: each against its neighbours by how the body
   * moves, all together by the gyroscopes. free: the gyroscopes alone; magnetometers are not looked at.
   */
  readonly heading: HeadingSource;
  /** What the sensors sit on; a straight body of 1 m with sensors evenly along it where left out. */
  readonly body?: ChainBody;
  /** How long after the sweep's time each sensor is sampled, s; zero if left out. */
  readonly samplingOffsetsS?: readonly number[];
  /** Rate of sensors that give a reading less often than the hub sweeps, by sensor; the hub's where left out. */
  readonly sensorRatesHz?: readonly (number | undefined)[];
  /** Range of the gyroscopes, by sensor: plus and minus this, rad/s. Where left out, only flagged readings are clipped. */
  readonly gyroRanges?: readonly (number | undefined)[];
  /** Matrices by rows (9) that take the sensor's axes to the body's, by sensor; the identity where left out. */
  readonly gyroAxes?: readonly (readonly number[] | undefined)[];
  readonly parameters?: Partial<FusionParameters>;
}

/** Standard deviation of an angle that could be anything, rad. */
const ANY_SIGMA = Math.PI / Math.sqrt(3);

export class ChainFusion {
  /** Four a sensor, body axes to earth, at the sweep's own time. Borrowed: they change with each step. */
  readonly orientations: Float64Array;
  /** TRUST codes, one a sensor. */
  readonly trust: Uint8Array;
  /** 1 where a reading was due and the orientation is predicted instead. */
  readonly bridged: Uint8Array;
  /** Of sensors that fuse on board: where their own orientation is taken, and how far it differs from ours. */
  readonly onBoard: OnBoard;
  /** Standard deviation of inclination and of heading, rad, one a sensor; that of any angle at all, π/√3, where lost. */
  readonly inclinationSigma: Float64Array;
  readonly headingSigma: Float64Array;

  readonly #parameters: FusionParameters;
  readonly #coefficients: Coefficients;
  readonly #relative: RelativeHeading;
  readonly #startHeading: HeadingSource;
  #heading: HeadingSource;
  readonly #records: readonly Float64Array[];
  readonly #offsetsS: Float64Array;
  /** A sensor without a reading for longer than this has missed one, s. */
  readonly #dueAfterS: Float64Array;
  /** Hub time of the newest sweep, s. */
  #timeS = -Infinity;

  constructor(options: ChainFusionOptions) {
    const {
      sensorCount,
      rateHz,
      heading,
      samplingOffsetsS = [],
      sensorRatesHz = [],
      gyroRanges = [],
      gyroAxes = [],
      parameters = {},
      body = straightBody(sensorCount),
    } = options;
    const intervalsS = Array.from({ length: sensorCount }, (_, i) => 1 / (sensorRatesHz[i] ?? rateHz));
    this.#parameters = { ...DEFAULT_PARAMETERS, ...parameters };
    this.#coefficients = new Coefficients(this.#parameters, rateHz);
    this.#startHeading = heading;
    this.#heading = heading;
    this.#relative = new RelativeHeading(body);
    this.#records = intervalsS.map((intervalS, i) =>
      createRecord(this.#parameters, intervalS, gyroRanges[i], gyroAxes[i]),
    );
    this.#offsetsS = Float64Array.from(intervalsS, (_, i) => samplingOffsetsS[i] ?? 0);
    this.#dueAfterS = Float64Array.from(intervalsS, (intervalS) => intervalS - 0.5 / rateHz);
    this.orientations = new Float64Array(sensorCount * 4);
    this.trust = new Uint8Array(sensorCount);
    this.bridged = new Uint8Array(sensorCount);
    this.onBoard = new OnBoard(sensorCount);
    this.inclinationSigma = new Float64Array(sensorCount);
    this.headingSigma = new Float64Array(sensorCount);
    this.reset();
  }

  /** Back to before the first sweep. */
  reset(): void {
    this.#records.forEach((record, sensor) => {
      resetRecord(record, this.#parameters);
      setIdentity(this.orientations, sensor * 4);
    });
    this.trust.fill(TRUST.LOST);
    this.bridged.fill(0);
    this.inclinationSigma.fill(ANY_SIGMA);
    this.headingSigma.fill(ANY_SIGMA);
    this.#timeS = -Infinity;
    this.#heading = this.#startHeading;
    this.#relative.reset();
    this.onBoard.reset();
  }

  /** What holds the headings now. */
  get heading(): HeadingSource {
    return this.#heading;
  }

  /** Standard deviation of the heading between each sensor and the next, rad; kept up in relative heading only. Borrowed. */
  get relativeSigma(): Float64Array {
    return this.#relative.sigma;
  }

  /** From now on headings are held by another source. Nothing jumps: the present headings are corrected gradually. */
  setHeading(source: HeadingSource): void {
    if (source === this.#heading) return;
    this.#heading = source;
    this.#relative.reset();
    if (source !== "magnetic") return;
    for (const record of this.#records) keepHeading(record);
  }

  /**
   * One sweep: reads values, presence, conditions and time; updates all orientations. A sweep whose time does not advance
   * changes nothing.
   */
  step(sweep: Sweep): void {
    if (!(sweep.timeS > this.#timeS)) return;
    this.#timeS = sweep.timeS;
    for (let sensor = 0; sensor < this.#records.length; sensor++) {
      const record = this.#records[sensor]!;
      record[Slot.NOW] = sweep.timeS;
      this.#update(record, sweep, sensor);
      this.#write(record, sensor);
      this.#takeOnBoard(record, sweep, sensor);
    }
    if (this.#heading === "relative") this.#holdTogether(sweep);
  }

  /** Turns the headings as the body says; seen with the next sweep. */
  #holdTogether(sweep: Sweep): void {
    this.#relative.step(sweep, this.#records, this.orientations);
    const { turns } = this.#relative;
    for (let sensor = 0; sensor < turns.length; sensor++) {
      const record = this.#records[sensor]!;
      record[Slot.TURN + 2] = turns[sensor]!;
      turnHeading(record);
    }
  }

  #update(r: Float64Array, sweep: Sweep, sensor: number): void {
    if (r[Slot.STARTED] === 1 && r[Slot.NOW]! - r[Slot.RATE_TIME]! > this.#parameters.lostAfterS) {
      r[Slot.START_YAW] = noseYaw(r);
      loseOrientation(r, this.#parameters);
    }
    const parts = takeReading(r, sweep, sensor);
    if (!(parts & HAS_GYRO)) return;
    const conditions = sweep.conditions[sensor]!;
    const magnetic = this.#heading === "magnetic";
    const fieldCounts = magnetic && parts >= HAS_MAG && (conditions & CONDITION.MAG_DISTURBED) === 0;
    r[Slot.CLIPPED_AXES] = clippedAxes(r, sweep, sensor);
    if (r[Slot.CLIPPED_AXES] !== 0 || conditions & CONDITION.GYRO_CLIPPED) r[Slot.CLIPPED] = 1;
    else if (r[Slot.CLIP_COUNT] === 0 && r[Slot.CLIPPED] === 1 && isRecovered(r, magnetic, this.#parameters))
      r[Slot.CLIPPED] = 0;
    if (r[Slot.STARTED] === 0) {
      if ((parts & HAS_INERTIAL) !== HAS_INERTIAL) return;
      this.#start(r);
    } else {
      turn(r, this.#parameters);
      if (parts & HAS_ACCEL) carryToEnd(r, Slot.FORCE);
      if (parts & HAS_MAG) carryToEnd(r, Slot.FIELD);
      if (r[Slot.CLIP_COUNT] !== 0) {
        const forceCounts = (conditions & CONDITION.ACCEL_CLIPPED) === 0;
        const fresh = (fieldCounts ? HAS_MAG : 0) | (forceCounts ? parts & HAS_ACCEL : 0);
        settleStretch(r, fresh, this.#parameters);
      } else if (r[Slot.GAP_VARIANCE]! > 0) settleGap(r, fieldCounts, this.#parameters);
      if (parts & HAS_ACCEL) this.#level(r);
      else composeLevel(r);
    }
    if (this.#heading !== "free" && parts & HAS_MAG) {
      r[Slot.FIELD_FLAGGED] = conditions & CONDITION.MAG_DISTURBED ? 1 : 0;
      this.#head(r);
    }
  }

  /** First reading: its specific force gives the inclination. */
  #start(r: Float64Array): void {
    r[Slot.STARTED] = 1;
    r[Slot.RATE_TIME] = r[Slot.NOW]!;
    r[Slot.FORCE_TIME] = r[Slot.NOW]!;
    r[Slot.RATE_STEP] = r[Slot.INTERVAL]!;
    r[Slot.FORCE_STEP] = r[Slot.INTERVAL]!;
    takeRate(r);
    watchRest(r, this.#coefficients, this.#parameters);
    const gains = this.#coefficients.forStep(r, Slot.INTERVAL);
    averageForce(r, gains, this.#parameters);
    narrowInclination(r, this.#parameters);
    correctInclination(r);
    r[Slot.SPAN_TILT] = 0;
    r[Slot.SPAN_TILT + 1] = 0;
    composeLevel(r);
    startHeading(r);
    if (this.#heading !== "magnetic") r[Slot.HEADING_VARIANCE] = 0;
  }

  /** A new specific force. */
  #level(r: Float64Array): void {
    r[Slot.FORCE_STEP] = r[Slot.NOW]! - r[Slot.FORCE_TIME]!;
    r[Slot.FORCE_TIME] = r[Slot.NOW]!;
    watchRest(r, this.#coefficients, this.#parameters);
    const gains = this.#coefficients.forStep(r, Slot.FORCE_STEP);
    if (averageForce(r, gains, this.#parameters)) correctInclination(r);
    narrowInclination(r, this.#parameters);
    composeLevel(r);
    estimateBias(r, this.#coefficients, this.#parameters);
  }

  /** A new magnetic field. */
  #head(r: Float64Array): void {
    r[Slot.FIELD_STEP] = r[Slot.FIELD_SEEN] === 1 ? r[Slot.NOW]! - r[Slot.FIELD_TIME]! : r[Slot.INTERVAL]!;
    r[Slot.FIELD_TIME] = r[Slot.NOW]!;
    r[Slot.FIELD_SEEN] = 1;
    levelField(r);
    if (!sumField(r, this.#parameters)) return;
    const gains = this.#coefficients.forStep(r, Slot.FIELD_STEP);
    keepField(r);
    watchField(r, gains, this.#parameters);
    if (this.#heading === "magnetic") correctHeading(r, gains, this.#parameters);
  }

  /** The output at the sweep's own time. A lost orientation stands still. */
  #write(r: Float64Array, sensor: number): void {
    const at = sensor * 4;
    const ageS = r[Slot.NOW]! - r[Slot.RATE_TIME]!;
    const bridged = r[Slot.STARTED] === 1 && ageS > this.#dueAfterS[sensor]!;
    if (r[Slot.STARTED] === 1) {
      composeEarth(r, this.orientations, at);
      const aheadS = ageS - this.#offsetsS[sensor]!;
      if (aheadS !== 0) extrapolate(r, this.orientations, at, aheadS, this.#parameters.slopeFadeS);
      // Going back within what was read predicts nothing.
      const predictedS = Math.max(0, aheadS);
      // Nothing passing: at the end of a span is often enough.
      if (predictedS !== 0 || r[Slot.CLIP_COUNT] !== 0 || r[Slot.SPAN] === 0) {
        this.inclinationSigma[sensor] = inclinationSigma(r, predictedS, this.#parameters);
        this.headingSigma[sensor] = headingSigma(r, predictedS, this.#parameters);
      }
    } else {
      this.inclinationSigma[sensor] = ANY_SIGMA;
      this.headingSigma[sensor] = ANY_SIGMA;
    }
    this.bridged[sensor] = bridged ? 1 : 0;
    this.trust[sensor] = trustOf(r, this.#headingTrust(r, sensor), bridged, this.#parameters);
  }

  /** Without raw readings the sensor's own orientation stands; should they come, ours goes on from its yaw. */
  #takeOnBoard(r: Float64Array, sweep: Sweep, sensor: number): void {
    const ours = r[Slot.STARTED] === 1;
    const ageS = this.onBoard.take(sweep, sensor, ours, this.orientations, this.#parameters.lostAfterS);
    if (this.onBoard.used[sensor] === 0) return;
    this.bridged[sensor] = ageS > this.#dueAfterS[sensor]! ? 1 : 0;
    this.trust[sensor] = this.bridged[sensor] === 1 ? TRUST.BRIDGED : TRUST.FUSED_ON_BOARD;
    r[Slot.START_YAW] = yawOf(this.orientations, 4 * sensor);
  }

  #headingTrust(r: Float64Array, sensor: number): number {
    if (this.#heading === "magnetic") return magneticTrust(r, this.#parameters);
    return this.#heading === "relative" ? this.#relative.trust[sensor]! : TRUST.HEADING_UNAIDED;
  }
}

/** A new angular rate. */
function turn(r: Float64Array, parameters: FusionParameters): void {
  r[Slot.RATE_STEP] = r[Slot.NOW]! - r[Slot.RATE_TIME]!;
  r[Slot.RATE_TIME] = r[Slot.NOW]!;
  r[Slot.HEADING_DRIFT]! += parameters.biasSigmaMotion * r[Slot.RATE_STEP]!;
  integrateRate(r, parameters);
}

function straightBody(sensorCount: number): ChainBody {
  const stations = Array.from({ length: sensorCount }, (_, i) => (i + 0.5) / sensorCount);
  return { stations, lengthM: 1, meanBend: 0 };
}
