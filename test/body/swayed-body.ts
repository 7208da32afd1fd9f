/**
 * A body whose nose is swayed by a prescribed amount, straight or bending under a wave, told in closed form, with sensors
 * that have noise and biases: through fusion, rhythm and midline to the nose's motion.
 *
 * Readings are means over the interval that they end, as the fusion takes them.
 */
import { HeadMotion } from "../../bridge/body/head-motion.ts";
import { Midline } from "../../bridge/body/midline.ts";
import { TravelAxis } from "../../bridge/body/travel-axis.ts";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { DEFAULT_PARAMETERS } from "../../bridge/fusion/parameters.ts";
import { STANDARD_GRAVITY } from "../../bridge/numeric/units.ts";
import { Random } from "../../bridge/rehearsal/random.ts";
import { EARTH_FIELD_UT } from "../../bridge/rehearsal/simulated-rig.ts";
import {
  ACCEL,
  CHANNELS,
  createSweep,
  GYRO,
  HAS_INERTIAL,
  HAS_MAG,
  MAG,
  type Sweep,
} from "../../bridge/sweep.ts";
import { Rhythm } from "../../bridge/wave/rhythm.ts";

const STATIONS = [0.06, 0.24, 0.41, 0.58, 0.75, 0.92];
const LENGTH_M = 0.64;
const POINTS = 41;
const RATE_HZ = 100;
const STEP_S = 1 / RATE_HZ;
/** Of the travel axis, rad from east. */
const HEADING = 0.6;
/** A small step for derivatives, s: their error is of its square. */
const SMALL_S = 1e-4;
/** Per reading: rad/s, m/s², µT; common practice for such sensors, no source. */
const NOISE = { gyro: 0.003, accel: 0.03, mag: 0.5 } as const;
/** 20 mg either way on every axis, m/s². */
const BIAS = 0.196;

export interface Swayed {
  /** Sway to the left at a time, m. */
  readonly sway: (timeS: number) => number;
  /** Yaw against the travel axis at a station and time, rad; a straight body where left out. */
  readonly yaw?: (station: number, timeS: number) => number;
  /** Accelerometers that show gravity alone. */
  readonly gravityAlone?: boolean;
  readonly spoil?: (sweep: Sweep) => void;
}

export class SwayedBody {
  readonly head: HeadMotion;
  readonly midline = new Midline({ lengthM: LENGTH_M, stations: STATIONS, pointCount: POINTS });
  readonly rhythm = new Rhythm(STATIONS);
  readonly travel = new TravelAxis(RATE_HZ);
  timeS = 0;
  readonly #fusion = new ChainFusion({ sensorCount: STATIONS.length, rateHz: RATE_HZ, heading: "magnetic" });
  readonly #sweep = createSweep(STATIONS.length);
  readonly #random = Random.forStream(11, 0);
  readonly #biases = STATIONS.map(() => [0, 1, 2].map(() => (this.#random.uniform() < 0.5 ? -BIAS : BIAS)));
  readonly #body: Swayed;

  constructor(body: Swayed) {
    this.#body = body;
    this.head = new HeadMotion({
      stations: STATIONS,
      lengthM: LENGTH_M,
      pointCount: POINTS,
      // Readings are means: of the middle of their interval, the orientations of its end.
      delayS: 0.5 * STEP_S,
      levelTauS: DEFAULT_PARAMETERS.accelTauS,
    });
    this.#sweep.stepS = STEP_S;
  }

  run(untilS: number, each: () => void = () => {}): void {
    const { orientations, trust } = this.#fusion;
    const { positions } = this.midline;
    for (; this.timeS < untilS - STEP_S / 2; this.timeS += STEP_S) {
      const sweep = this.#sweep;
      sweep.timeS = this.timeS;
      sweep.present.fill(HAS_INERTIAL | HAS_MAG);
      sweep.conditions.fill(0);
      STATIONS.forEach((station, i) => {
        this.#read(station, i);
      });
      this.#body.spoil?.(sweep);
      this.#fusion.step(sweep);
      this.rhythm.step(sweep, orientations, trust);
      this.midline.step(orientations, trust);
      const { frequencyHz } = this.rhythm;
      this.travel.step(STEP_S, positions, frequencyHz === null ? null : 1 / frequencyHz);
      this.head.step(sweep, orientations, trust, this.rhythm, this.travel.direction, positions);
      each();
    }
  }

  /** Amplitude (m) and phase (rad) of the nose's sway and of its surge and heave at a frequency, over some whole beats. */
  measure(frequencyHz: number, beats: number): { amplitude: number; phase: number; astray: number } {
    let c = 0;
    let s = 0;
    let astray = 0;
    let count = 0;
    this.run(this.timeS + beats / frequencyHz, () => {
      const angle = 2 * Math.PI * frequencyHz * this.timeS;
      const [surge, sway, heave] = this.head.displacement;
      c += sway! * Math.cos(angle);
      s += sway! * Math.sin(angle);
      astray = Math.max(astray, Math.abs(surge!), Math.abs(heave!));
      count++;
    });
    return { amplitude: (2 * Math.hypot(c, s)) / count, phase: Math.atan2(c, s), astray };
  }

  #read(station: number, sensor: number): void {
    const { yaw = () => 0, gravityAlone = false } = this.#body;
    const toS = this.timeS;
    const fromS = toS - STEP_S;
    const heading = HEADING + yaw(station, 0.5 * (fromS + toS));
    const after = this.#velocity(station, toS);
    const before = this.#velocity(station, fromS);
    const [ahead, left] = gravityAlone
      ? [0, 0]
      : [(after[0] - before[0]) / STEP_S, (after[1] - before[1]) / STEP_S];
    // Velocities are in travel axes; the sensor is turned against them by its yaw.
    const turned = heading - HEADING;
    const values = this.#sweep.values;
    const at = CHANNELS * sensor;
    values[at + GYRO + 2] = (yaw(station, toS) - yaw(station, fromS)) / STEP_S;
    values[at + GYRO] = 0;
    values[at + GYRO + 1] = 0;
    values[at + ACCEL] = Math.cos(turned) * ahead + Math.sin(turned) * left;
    values[at + ACCEL + 1] = Math.cos(turned) * left - Math.sin(turned) * ahead;
    values[at + ACCEL + 2] = STANDARD_GRAVITY;
    const [east, north, up] = EARTH_FIELD_UT as [number, number, number];
    values[at + MAG] = Math.cos(heading) * east + Math.sin(heading) * north;
    values[at + MAG + 1] = Math.cos(heading) * north - Math.sin(heading) * east;
    values[at + MAG + 2] = up;
    for (let axis = 0; axis < 3; axis++) {
      values[at + GYRO + axis]! += NOISE.gyro * this.#random.normal();
      values[at + ACCEL + axis]! += this.#biases[sensor]![axis]! + NOISE.accel * this.#random.normal();
      values[at + MAG + axis]! += NOISE.mag * this.#random.normal();
    }
  }

  /** Of a place on the body, travel axes. */
  #velocity(station: number, timeS: number): [number, number] {
    const after = this.#place(station, timeS + SMALL_S);
    const before = this.#place(station, timeS - SMALL_S);
    return [(after[0] - before[0]) / (2 * SMALL_S), (after[1] - before[1]) / (2 * SMALL_S)];
  }

  /** Ahead and left of the mean nose, m: the midline integrated from the nose by the midpoint rule. */
  #place(station: number, timeS: number): [number, number] {
    const { sway, yaw } = this.#body;
    const panels = yaw === undefined ? 1 : 32;
    let ahead = 0;
    let left = sway(timeS);
    for (let i = 0; i < panels; i++) {
      const angle = yaw?.((station * (i + 0.5)) / panels, timeS) ?? 0;
      ahead -= (Math.cos(angle) * station * LENGTH_M) / panels;
      left -= (Math.sin(angle) * station * LENGTH_M) / panels;
    }
    return [ahead, left];
  }
}
