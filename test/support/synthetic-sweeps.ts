/**
 * Sweeps made directly, without packets: a chain of sensors that sways like a swimming body, in gravity and the Earth's
 * field, with the model's noise, counts and range. Seeded; a test spoils single readings as it likes.
 */
import type { SensorModel } from "../../bridge/rig/sensor-model.ts";
import { CHANNELS, createSweep, HAS_ACCEL, HAS_GYRO, HAS_MAG, type Sweep } from "../../bridge/sweep.ts";

const DEG = Math.PI / 180;
const G = 9.80665;

/** As config/sensors/nine-axis-1000.json. */
export const NINE_AXIS: SensorModel = {
  name: "nine-axis",
  notes: "",
  delayMs: 0,
  gyro: { rangeDegPerS: 1000, bits: 16, noiseDegPerSPerSqrtHz: 0.006, biasDegPerS: 1 },
  accel: { rangeG: 8, bits: 16, noiseMicroGPerSqrtHz: 150, biasMilliG: 20 },
  mag: { rangeUT: 1200, bits: 16, noiseUT: 0.4, rateHz: 100 },
};

export interface Motion {
  readonly frequencyHz: number;
  readonly yawDeg: number;
  readonly pitchDeg: number;
  readonly rollDeg: number;
  /** Sideways, m. */
  readonly swayM: number;
}

export const CRUISE: Motion = { frequencyHz: 1.6, yawDeg: 18, pitchDeg: 3, rollDeg: 6, swayM: 0.03 };
/** Peak rates near 790 °/s. */
export const SPRINT: Motion = { frequencyHz: 5, yawDeg: 25, pitchDeg: 5, rollDeg: 8, swayM: 0.02 };
export const REST: Motion = { frequencyHz: 1, yawDeg: 0, pitchDeg: 0, rollDeg: 0, swayM: 0 };

export interface SyntheticOptions {
  readonly sensorCount?: number;
  readonly rateHz?: number;
  readonly seed?: number;
  readonly model?: SensorModel;
  readonly motion?: Motion;
  readonly fieldUT?: number;
  readonly dipDeg?: number;
}

export class SyntheticRig {
  readonly sweep: Sweep;
  /** True orientations as of the sweep before, sensors x 4. */
  readonly orientations: Float64Array;
  readonly model: SensorModel;
  readonly rateHz: number;
  motion: Motion;
  /** Earth's field: east, north, up, µT. */
  readonly field: [number, number, number];
  readonly #truth: Float64Array;
  readonly #noise: () => number;
  #tick = -1;
  #lost = 0;

  constructor(options: SyntheticOptions = {}) {
    const { sensorCount = 6, rateHz = 100, seed = 1, model = NINE_AXIS, motion = CRUISE } = options;
    const { fieldUT = 50, dipDeg = 69 } = options;
    this.sweep = createSweep(sensorCount);
    this.orientations = new Float64Array(sensorCount * 4);
    this.#truth = new Float64Array(sensorCount * 4);
    this.model = model;
    this.rateHz = rateHz;
    this.motion = motion;
    this.field = [0, fieldUT * Math.cos(dipDeg * DEG), -fieldUT * Math.sin(dipDeg * DEG)];
    this.#noise = gaussian(seed);
  }

  /** So many sweeps never arrive. */
  lose(count: number): void {
    this.#tick += count;
    this.#lost += count;
  }

  /** The next sweep; `spoil` may change it before it is taken as calibrated. */
  next(spoil?: (sweep: Sweep) => void): Sweep {
    const { sweep } = this;
    this.#tick++;
    sweep.sequence = this.#tick & 0xffff;
    sweep.timeS = this.#tick / this.rateHz;
    sweep.stepS = (this.#lost + 1) / this.rateHz;
    sweep.lostBefore = this.#lost;
    this.#lost = 0;
    sweep.conditions.fill(0);
    sweep.readStatus.fill(0);
    sweep.present.fill(HAS_GYRO | HAS_ACCEL | (this.model.mag ? HAS_MAG : 0));
    this.orientations.set(this.#truth);
    for (let i = 0; i < sweep.sensorCount; i++) this.#sensor(i, sweep.timeS);
    spoil?.(sweep);
    sweep.values.set(sweep.raw);
    return sweep;
  }

  #sensor(i: number, timeS: number): void {
    const { gyro, accel, mag } = this.model;
    const q = this.#pose(i, timeS);
    this.#truth.set(q, i * 4);
    const at = i * CHANNELS;
    const rates = bodyRates(this.#pose(i, timeS - 1e-4), this.#pose(i, timeS + 1e-4), 2e-4);
    const root = Math.sqrt(this.rateHz / 2);
    this.#write(at, rates, gyro.rangeDegPerS * DEG, gyro.bits, gyro.noiseDegPerSPerSqrtHz * DEG * root);
    const wave = 2 * Math.PI * this.motion.frequencyHz;
    const sway = -this.motion.swayM * wave * wave * Math.sin(wave * timeS - i);
    const force = toBody(q, [0, sway, G]);
    this.#write(at + 3, force, accel.rangeG * G, accel.bits, accel.noiseMicroGPerSqrtHz * 1e-6 * G * root);
    if (mag) this.#write(at + 6, toBody(q, this.field), mag.rangeUT, mag.bits, mag.noiseUT);
  }

  #write(at: number, truth: readonly number[], range: number, bits: number, noise: number): void {
    const count = (2 * range) / 2 ** bits;
    const top = 2 ** (bits - 1) - 1;
    for (let k = 0; k < 3; k++) {
      const counts = Math.round((truth[k]! + noise * this.#noise()) / count);
      this.sweep.raw[at + k] = Math.max(-top - 1, Math.min(top, counts)) * count;
    }
  }

  #pose(i: number, timeS: number): number[] {
    const { frequencyHz, yawDeg, pitchDeg, rollDeg } = this.motion;
    const phase = 2 * Math.PI * frequencyHz * timeS - i;
    const yaw = yawDeg * DEG * Math.sin(phase);
    const pitch = pitchDeg * DEG * Math.sin(phase + 1) + 0.05;
    const roll = rollDeg * DEG * Math.sin(phase + 2) - 0.03;
    const turn = (angle: number) => [Math.cos(angle / 2), Math.sin(angle / 2)] as const;
    const [cy, sy] = turn(yaw);
    const [cp, sp] = turn(-pitch);
    const [cr, sr] = turn(roll);
    return [
      cy * cp * cr + sy * sp * sr,
      cy * cp * sr - sy * sp * cr,
      cy * sp * cr + sy * cp * sr,
      sy * cp * cr - cy * sp * sr,
    ];
  }
}

/** Mean angular rate in body axes from one orientation to another, rad/s. */
function bodyRates([aw, ax, ay, az]: number[], [bw, bx, by, bz]: number[], stepS: number): number[] {
  const double = 2 / stepS;
  return [
    double * (aw! * bx! - ax! * bw! - ay! * bz! + az! * by!),
    double * (aw! * by! + ax! * bz! - ay! * bw! - az! * bx!),
    double * (aw! * bz! - ax! * by! + ay! * bx! - az! * bw!),
  ];
}

/** Earth to body. */
function toBody([w, x, y, z]: number[], [a, b, c]: readonly number[]): number[] {
  const q = [w!, -x!, -y!, -z!];
  const t = [2 * (q[2]! * c! - q[3]! * b!), 2 * (q[3]! * a! - q[1]! * c!), 2 * (q[1]! * b! - q[2]! * a!)];
  return [
    a! + q[0]! * t[0]! + q[2]! * t[2]! - q[3]! * t[1]!,
    b! + q[0]! * t[1]! + q[3]! * t[0]! - q[1]! * t[2]!,
    c! + q[0]! * t[2]! + q[1]! * t[1]! - q[2]! * t[0]!,
  ];
}

/** Standard normal numbers by Box and Muller (1958) from a Park-Miller generator. */
function gaussian(seed: number): () => number {
  let state = (seed * 48_271) % 2_147_483_647;
  const uniform = () => {
    state = (state * 16_807) % 2_147_483_647;
    return state / 2_147_483_647;
  };
  let spare = Number.NaN;
  return () => {
    if (!Number.isNaN(spare)) {
      const value = spare;
      spare = Number.NaN;
      return value;
    }
    const radius = Math.sqrt(-2 * Math.log(uniform()));
    const angle = 2 * Math.PI * uniform();
    spare = radius * Math.sin(angle);
    return radius * Math.cos(angle);
  };
}
