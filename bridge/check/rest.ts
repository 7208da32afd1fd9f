/** Rest: each sensor's noise, bias, gravity and field while it lies still, as the rest detector's windows tell them. */
import { DEG_PER_RAD, STANDARD_GRAVITY } from "../numeric/units.ts";
import type { Sweep } from "../sweep.ts";
import type { CheckReason } from "../wire/check.ts";
import {
  type CheckSetup,
  type Finding,
  figure,
  inUse,
  type JudgedFigure,
  lowest,
  type Step,
} from "./step.ts";

const MILLI_G = STANDARD_GRAVITY / 1000;
/** Each axis may have the data sheet's whole offset. */
const OFFSET = Math.sqrt(3);

/** Sums over the windows of one sensor; noise as squares. */
interface Sums {
  windows: number;
  stillS: number;
  readonly bias: [number, number, number];
  gravity: number;
  fieldUT: number;
  gyroNoise: number;
  accelNoise: number;
}

export class RestStep implements Step {
  readonly toDo = "Lay the body straight and let go: nothing may move.";
  readonly #setup: CheckSetup;
  readonly #sums: readonly Sums[];

  constructor(setup: CheckSetup) {
    this.#setup = setup;
    this.#sums = setup.sensors.map(() => ({
      windows: 0,
      stillS: 0,
      bias: [0, 0, 0],
      gravity: 0,
      fieldUT: 0,
      gyroNoise: 0,
      accelNoise: 0,
    }));
  }

  observe({ sensorCount }: Sweep): void {
    const { windowEnded, window } = this.#setup.rest();
    for (let i = 0; i < sensorCount; i++) {
      if (windowEnded[i] === 0) continue;
      const sums = this.#sums[i]!;
      sums.windows++;
      sums.stillS += window.stillS[i]!;
      for (let k = 0; k < 3; k++) sums.bias[k]! += window.gyroBias[3 * i + k]!;
      sums.gravity += window.gravity[i]!;
      sums.fieldUT += window.fieldUT[i]!;
      sums.gyroNoise += window.gyroNoise[i]! ** 2;
      sums.accelNoise += window.accelNoise[i]! ** 2;
    }
  }

  finding(isOut: readonly boolean[]): Finding {
    const { limits, models, fieldUT } = this.#setup;
    const used = inUse(isOut);
    const missing = used.flatMap((sensor): CheckReason[] => {
      const { stillS } = this.#sums[sensor]!;
      if (stillS >= limits.stillS) return [];
      return [{ sensor, text: `still for ${stillS.toFixed(0)} s, ${limits.stillS} s are needed` }];
    });
    const withMag = models.some(({ mag }) => mag !== undefined);
    return {
      share: Math.min(1, lowest(used.map((i) => this.#sums[i]!.stillS)) / limits.stillS),
      missing,
      figures: used.flatMap((i) => this.#figures(i)),
      faults: [],
      notes:
        withMag && fieldUT === null
          ? ["The rig file names no site: the field is not compared with the Earth's."]
          : [],
    };
  }

  #figures(sensor: number): JudgedFigure[] {
    const { limits, models, gravity, fieldUT } = this.#setup;
    const { gyro, accel, mag } = models[sensor]!;
    const { windows, bias, ...sums } = this.#sums[sensor]!;
    const shaken = "look for something that shakes it; if there is nothing, replace the sensor";
    const gravityOff = limits.restGravityShare * OFFSET * accel.biasMilliG;
    const figures = [
      figure(Math.sqrt(sums.gyroNoise / windows) * DEG_PER_RAD, {
        name: "gyroscope noise",
        sensor,
        unit: "°/s/√Hz",
        digits: 4,
        most: this.#allowedNoise(sensor, gyro.noiseDegPerSPerSqrtHz, gyro.rangeDegPerS, gyro.bits),
        advice: shaken,
      }),
      figure((Math.sqrt(sums.accelNoise / windows) / MILLI_G) * 1000, {
        name: "accelerometer noise",
        sensor,
        unit: "µg/√Hz",
        digits: 0,
        most: this.#allowedNoise(sensor, accel.noiseMicroGPerSqrtHz, accel.rangeG * 1e6, accel.bits),
        advice: shaken,
      }),
      figure((Math.hypot(...bias) / windows) * DEG_PER_RAD, {
        name: "rate at rest",
        sensor,
        unit: "°/s",
        digits: 2,
        most: limits.restGyroBiasShare * OFFSET * gyro.biasDegPerS,
        advice: "find its gyroscope bias anew at rest; if it comes back, replace the sensor",
      }),
      figure((sums.gravity / windows - gravity) / MILLI_G, {
        name: "gravity off by",
        sensor,
        unit: "mg",
        digits: 1,
        least: -gravityOff,
        most: gravityOff,
        advice: "calibrate its accelerometer again in six positions",
      }),
    ];
    if (mag === undefined || fieldUT === null) return figures;
    const most = 100 * limits.fieldOffShare;
    const field = figure(100 * (sums.fieldUT / windows / fieldUT - 1), {
      name: "field off by",
      sensor,
      unit: "%",
      digits: 1,
      least: -most,
      most,
      advice: "look for magnets and steel nearby, else calibrate its magnetometer again",
    });
    return [...figures, field];
  }

  /** Density, in the units of its model; rounding to whole counts adds a twelfth of a count's square to each reading. */
  #allowedNoise(sensor: number, density: number, range: number, bits: number): number {
    const { sensors, rateHz, limits } = this.#setup;
    const readingsHz = Math.min(sensors[sensor]!.rateHz ?? rateHz, rateHz);
    const rounding = (2 * range) / 2 ** bits / Math.sqrt(12) / Math.sqrt(readingsHz / 2);
    return limits.restNoiseFactor * Math.hypot(density, rounding);
  }
}
