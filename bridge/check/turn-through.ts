/**
 * Turn-through: each magnetometer seen from many directions. With the calibration in use the field's length must stay the
 * same whichever way the sensor looks: a wrong hard or soft iron shows as a scatter of it.
 */
import { CELLS, cellOf, describeMissing, shareSeen } from "../calibration/sphere.ts";
import { CHANNELS, HAS_MAG, MAG, type Sweep } from "../sweep.ts";
import type { FlagKind } from "../wire/flag.ts";
import {
  type CheckSetup,
  type Finding,
  figure,
  inUse,
  type JudgedFigure,
  lowest,
  type Step,
} from "./step.ts";

/** A reading counts when it lies this far from the last that did: a sensor at rest adds nothing. µT */
const APART_UT = 2;

export class TurnThroughStep implements Step {
  readonly toDo = "Turn the whole body slowly through as many directions as it can go.";
  readonly notNeeded: string | undefined;
  readonly #setup: CheckSetup;
  /** sensors x 3, the last reading that counted. */
  readonly #last: Float64Array;
  /** Cells seen, by sensor. */
  readonly seen: boolean[][];
  /** Mean of the field's length and sum of squares about it (Welford). */
  readonly #count: Uint32Array;
  readonly #mean: Float64Array;
  readonly #square: Float64Array;

  constructor(setup: CheckSetup) {
    const n = setup.sensors.length;
    this.#setup = setup;
    this.#last = new Float64Array(3 * n).fill(Number.POSITIVE_INFINITY);
    this.seen = setup.sensors.map(() => new Array<boolean>(CELLS).fill(false));
    this.#count = new Uint32Array(n);
    this.#mean = new Float64Array(n);
    this.#square = new Float64Array(n);
    this.notNeeded = setup.models.some(({ mag }) => mag) ? undefined : "No sensor has a magnetometer.";
  }

  ignores(kind: FlagKind): boolean {
    return kind.includes("magnetic interference");
  }

  observe({ values, present, sensorCount }: Sweep): void {
    for (let i = 0; i < sensorCount; i++) {
      if ((present[i]! & HAS_MAG) === 0) continue;
      const at = i * CHANNELS + MAG;
      const [x, y, z] = [values[at]!, values[at + 1]!, values[at + 2]!];
      const last = this.#last;
      if (Math.hypot(x - last[3 * i]!, y - last[3 * i + 1]!, z - last[3 * i + 2]!) < APART_UT) continue;
      last[3 * i] = x;
      last[3 * i + 1] = y;
      last[3 * i + 2] = z;
      this.seen[i]![cellOf(values, at)] = true;
      const length = Math.hypot(x, y, z);
      const off = length - this.#mean[i]!;
      this.#count[i]!++;
      this.#mean[i]! += off / this.#count[i]!;
      this.#square[i]! += off * (length - this.#mean[i]!);
    }
  }

  finding(isOut: readonly boolean[]): Finding {
    const { models, limits } = this.#setup;
    const used = inUse(isOut).filter((i) => models[i]!.mag !== undefined);
    const shares = used.map((i) => shareSeen(this.seen[i]!));
    const enough = limits.coverageShare;
    return {
      share: enough === 0 ? 1 : Math.min(1, lowest(shares) / enough),
      missing: used.flatMap((sensor, k) => {
        if (shares[k]! >= enough) return [];
        const sides = describeMissing(this.seen[sensor]!);
        const text = `${percent(shares[k]!)} of the directions seen, ${percent(enough)} are needed`;
        return [{ sensor, text: sides === "" ? text : `${text}; missing: ${sides}` }];
      }),
      figures: used.flatMap((sensor, k) => this.#figures(sensor, shares[k]!)),
      faults: [],
      notes: models.some(({ mag }) => mag === undefined)
        ? ["Sensors without a magnetometer are not judged here."]
        : [],
    };
  }

  #figures(sensor: number, share: number): JudgedFigure[] {
    const { limits, fieldUT } = this.#setup;
    // Few directions tell nothing of the scatter over all of them.
    const judged = share >= limits.coverageShare / 2;
    const mean = this.#mean[sensor]!;
    const rms = judged ? Math.sqrt(this.#square[sensor]! / this.#count[sensor]!) : Number.NaN;
    const advice =
      "look for magnets and steel nearby, else calibrate it again (bendwatch calibrate --kind turn-through, also from this trial)";
    return [
      figure(100 * share, { name: "directions seen", sensor, unit: "%", digits: 0, advice }),
      figure((100 * rms) / (fieldUT ?? mean), {
        name: "field's length scatters by",
        sensor,
        unit: "%",
        digits: 1,
        most: 100 * limits.fieldSpreadShare,
        advice,
      }),
    ];
  }
}

function percent(share: number): string {
  return `${Math.round(share * 100)} %`;
}
