/**
 * Bend: whether the chain bends as a chain. The mountings are found afresh from a straight pose and a bend
 * (calibration/mounting.ts) and held against those in use; the order in which the bend reaches the sensors is held against
 * the rig file's (numeric/phase-order.ts).
 */
import { mountingMatrix } from "../calibration/calibration.ts";
import { Mounting, type MountingNumbers } from "../calibration/mounting.ts";
import type { Outcome } from "../calibration/procedure.ts";
import { PhaseOrder } from "../numeric/phase-order.ts";
import { DEG_PER_RAD, RAD_PER_DEG } from "../numeric/units.ts";
import type { SensorPlace } from "../rig/rig.ts";
import {
  CHANNELS,
  CONDITION,
  createSweep,
  GYRO,
  HAS_INERTIAL,
  HAS_ORIENTATION,
  type Sweep,
} from "../sweep.ts";
import type { CheckReason } from "../wire/check.ts";
import { type CheckSetup, type Finding, figure, inUse, type JudgedFigure, type Step } from "./step.ts";

/** Below this RMS rate a sensor does not wave, rad/s. */
const WAVING = 0.1;
/** Beats need no more than this many looks a second. */
const LOOK_S = 0.02;
/** Time constant of the mean rate that is taken off, s. */
const MEAN_S = 1;
const BROKEN = CONDITION.STUCK | CONDITION.READ_FAILED | CONDITION.GYRO_CLIPPED;

export class BendStep implements Step {
  readonly toDo =
    "Hold the body straight and still for three seconds, then bend it from side to side, all of it.";
  readonly #setup: CheckSetup;
  /** The sensors checked, by index; what is left out gives no pose. */
  readonly #used: readonly number[];
  readonly #mounting: Mounting;
  /** Their part of each sweep. */
  readonly #part: Sweep;
  readonly #order: PhaseOrder;
  readonly #meanRate: Float64Array;
  readonly #signals: Float64Array;
  #lookS = Number.NEGATIVE_INFINITY;
  /** Found once there is enough: it takes some work. */
  #outcomes: readonly Outcome<MountingNumbers>[] | null = null;

  constructor(setup: CheckSetup, isOut: readonly boolean[]) {
    const { sensors, models, rateHz, lengthM } = setup;
    const used = inUse(isOut);
    this.#setup = setup;
    this.#used = used;
    this.#mounting = new Mounting({
      sensors: used.map((i) => sensors[i]!),
      models: used.map((i) => models[i]!),
      rateHz,
      lengthM,
      poses: [{ pitch: 0, roll: 0 }],
      bend: true,
      bearing: null,
    });
    this.#part = createSweep(used.length);
    this.#order = new PhaseOrder(used.map((i) => sensors[i]!.station));
    this.#meanRate = new Float64Array(used.length);
    this.#signals = new Float64Array(used.length);
  }

  observe(sweep: Sweep): void {
    if (this.#outcomes !== null) return;
    this.#mounting.observe(this.#partOf(sweep));
    const { share } = this.#mounting.progress();
    // Past the pose the bend is on.
    if (share >= 0.5) this.#look(sweep);
    if (share >= 1) this.#outcomes = this.#mounting.result();
  }

  #partOf(sweep: Sweep): Sweep {
    const part = this.#part;
    part.timeS = sweep.timeS;
    part.stepS = sweep.stepS;
    part.lostBefore = sweep.lostBefore;
    this.#used.forEach((i, k) => {
      part.present[k] = sweep.present[i]! & ~HAS_ORIENTATION;
      for (let c = 0; c < CHANNELS; c++) part.raw[k * CHANNELS + c] = sweep.raw[i * CHANNELS + c]!;
    });
    return part;
  }

  #look({ timeS, values, present, conditions }: Sweep): void {
    const spanS = timeS - this.#lookS;
    if (spanS < LOOK_S - 1e-4) return;
    this.#lookS = timeS;
    const weight = Math.min(1, spanS / MEAN_S);
    this.#used.forEach((i, k) => {
      const good = (present[i]! & HAS_INERTIAL) === HAS_INERTIAL && (conditions[i]! & BROKEN) === 0;
      const rate = values[i * CHANNELS + GYRO + 2]!;
      if (good) this.#meanRate[k]! += weight * (rate - this.#meanRate[k]!);
      this.#signals[k] = good ? rate - this.#meanRate[k]! : Number.NaN;
    });
    this.#order.add(timeS, this.#signals);
  }

  finding(): Finding {
    const { share, text } = this.#mounting.progress();
    const outcomes = this.#outcomes;
    if (outcomes === null) {
      return { share, missing: [{ sensor: -1, text: unended(text) }], figures: [], faults: [], notes: [] };
    }
    const order = this.#order.judge(WAVING, this.#setup.limits.reversedLagDeg * RAD_PER_DEG);
    const faults: CheckReason[] = [];
    if (order.kind === "swapped") {
      const [first, second] = [this.#used[order.first]!, this.#used[order.second]!];
      const name = this.#setup.sensors[second]!.name;
      faults.push({
        sensor: first,
        text: `the bend runs backwards unless it changes places with ${name}: check their plugs, and their order in the rig file`,
      });
    }
    return {
      share,
      missing: outcomes.flatMap((outcome, k) =>
        outcome.ok ? [] : [{ sensor: this.#used[k]!, text: outcome.reason }],
      ),
      figures: outcomes.flatMap((outcome, k) => this.#figures(this.#used[k]!, outcome)),
      faults,
      notes: [
        order.kind === "unclear"
          ? "The order of the sensors was not told: the body swung as a whole, or too few sensors wave."
          : "The bend ran along the body; its order was compared with the rig file's.",
      ],
    };
  }

  #figures(sensor: number, outcome: Outcome<MountingNumbers>): JudgedFigure[] {
    if (!outcome.ok) return [];
    const off = turnBetween(outcome.numbers, this.#setup.sensors[sensor]!.mounting);
    return [
      figure(off * DEG_PER_RAD, {
        name: "mounting off by",
        sensor,
        unit: "°",
        digits: 1,
        most: this.#setup.limits.mountingOffDeg,
        advice: "check how it sits and its mounting in the rig file, or find its mounting anew",
      }),
    ];
  }
}

function unended(sentence: string): string {
  return sentence.charAt(0).toLowerCase() + sentence.slice(1).replace(/\.$/, "");
}

/** The angle of the turn that carries one mounting onto the other, rad: from the trace of one times the other's inverse. */
function turnBetween(a: SensorPlace["mounting"], b: SensorPlace["mounting"]): number {
  const [ma, mb] = [mountingMatrix(a).flat(), mountingMatrix(b).flat()];
  const trace = ma.reduce((sum, value, k) => sum + value * mb[k]!, 0);
  return Math.acos(Math.max(-1, Math.min(1, (trace - 1) / 2)));
}
