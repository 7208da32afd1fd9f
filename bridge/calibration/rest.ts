/** Gyroscope bias: the mean rate while a sensor lies still, over the longest stretch in which it does. */
import { DEG_PER_RAD } from "../numeric/units.ts";
import type { SensorPlace } from "../rig/rig.ts";
import type { SensorModel } from "../rig/sensor-model.ts";
import { CHANNELS, GYRO, type Sweep } from "../sweep.ts";
import { type Outcome, type Procedure, type Progress, refused } from "./procedure.ts";
import { StillMeter } from "./still.ts";

export interface RestNumbers {
  readonly gyroBiasDegPerS: readonly [number, number, number];
  /** Figure of merit: standard deviation of each, °/s. */
  readonly sigmaDegPerS: number;
  readonly stillS: number;
}

/** Still for so long, it is enough; and for so long, it can be used, s. */
const ENOUGH_S = 20;
const LEAST_S = 8;
/** What a bias wanders within a minute, °/s (common practice for consumer units, no source). */
const WANDERS = 0.003;

export class RestBias implements Procedure<RestNumbers> {
  readonly #models: readonly SensorModel[];
  readonly #still: StillMeter;
  /** Longest stretch so far and its mean rate. */
  readonly #longestS: Float64Array;
  readonly #bias: Float64Array;

  constructor(sensors: readonly SensorPlace[], models: readonly SensorModel[], rateHz: number) {
    this.#models = models;
    this.#still = new StillMeter(
      sensors.map((sensor, i) => ({ model: models[i]!, rateHz: sensor.rateHz })),
      rateHz,
    );
    this.#longestS = new Float64Array(sensors.length);
    this.#bias = new Float64Array(sensors.length * 3);
  }

  observe(sweep: Sweep): void {
    this.#still.observe(sweep, sweep.raw);
    const { stillS, mean } = this.#still;
    for (let i = 0; i < stillS.length; i++) {
      if (stillS[i]! <= this.#longestS[i]!) continue;
      this.#longestS[i] = stillS[i]!;
      for (let k = 0; k < 3; k++) this.#bias[3 * i + k] = mean[i * CHANNELS + GYRO + k]!;
    }
  }

  progress(): Progress {
    const least = this.#longestS.reduce((a, b) => Math.min(a, b), ENOUGH_S);
    const moving = this.#still.stillS.findIndex((stillS, i) => stillS === 0 && this.#longestS[i]! < ENOUGH_S);
    if (least >= ENOUGH_S) return { share: 1, text: "Done." };
    const still =
      moving < 0 ? "Leave everything as it lies." : "Lay everything down and let go: something moves.";
    return { share: least / ENOUGH_S, text: still };
  }

  result(): readonly Outcome<RestNumbers>[] {
    return this.#models.map((model, i) => {
      const stillS = this.#longestS[i]!;
      if (stillS < LEAST_S) {
        return refused(
          `it lay still for ${stillS.toFixed(1)} s at most: ${LEAST_S} s are needed, ${ENOUGH_S} s are better`,
        );
      }
      const [x, y, z] = [0, 1, 2].map((k) => this.#bias[3 * i + k]! * DEG_PER_RAD);
      const noise = model.gyro.noiseDegPerSPerSqrtHz / Math.sqrt(2 * stillS);
      const numbers = {
        gyroBiasDegPerS: [x!, y!, z!] as const,
        sigmaDegPerS: Math.hypot(noise, WANDERS),
        stillS,
      };
      return { ok: true, numbers, warnings: [] };
    });
  }
}
