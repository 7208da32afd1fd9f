/** Link: whether all that is due arrives whole, from when the step is begun until the check ends. */
import { HAS_INERTIAL, HAS_ORIENTATION, type Sweep } from "../sweep.ts";
import { type CheckSetup, type Finding, figure, inUse, type LinkReadings, type Step } from "./step.ts";

export class LinkStep implements Step {
  readonly toDo = "Plug everything in, power the hub, and leave the rig as it is.";
  readonly #setup: CheckSetup;
  readonly #before: { readonly bad: number; readonly good: number };
  /** Sweeps from one reading due to the next, per sensor. */
  readonly #period: Float64Array;
  readonly #came: Uint32Array;
  #sweeps = 0;
  #lost = 0;
  #beganS = Number.NaN;
  #timeS = Number.NaN;

  constructor(setup: CheckSetup) {
    this.#setup = setup;
    const { counters } = setup.readings();
    this.#before = { bad: badOf(counters), good: counters.good };
    this.#period = Float64Array.from(setup.sensors, ({ rateHz }) =>
      Math.max(1, setup.rateHz / (rateHz ?? setup.rateHz)),
    );
    this.#came = new Uint32Array(setup.sensors.length);
  }

  observe({ timeS, lostBefore, present, sensorCount }: Sweep): void {
    // What was lost before the first sweep was lost before the step.
    if (this.#sweeps === 0) this.#beganS = timeS;
    else this.#lost += lostBefore;
    this.#sweeps++;
    this.#timeS = timeS;
    for (let i = 0; i < sensorCount; i++) {
      const here = present[i]!;
      if ((here & HAS_INERTIAL) === HAS_INERTIAL || (here & HAS_ORIENTATION) !== 0) this.#came[i]!++;
    }
  }

  finding(isOut: readonly boolean[]): Finding {
    const { limits, readings } = this.#setup;
    const share = this.#sweeps === 0 ? 0 : Math.min(1, (this.#timeS - this.#beganS) / limits.linkS);
    const { counters } = readings();
    const bad = badOf(counters) - this.#before.bad;
    const packets = bad + counters.good - this.#before.good;
    const due = this.#sweeps + this.#lost;
    const least = 100 * limits.deliveredShare;
    return {
      share,
      missing: this.#sweeps === 0 ? [{ sensor: -1, text: "no sweep has come" }] : [],
      figures: [
        figure((100 * this.#sweeps) / due, {
          name: "sweeps received",
          unit: "%",
          digits: 2,
          least,
          advice: "check the cable between hub and computer",
        }),
        figure((100 * bad) / packets, {
          name: "corrupt packets",
          unit: "%",
          digits: 2,
          most: 100 * limits.corruptShare,
          advice: "check cable, connector, ground and baud rate",
        }),
        // Of the sweeps that came. One reading's grace: a sensor that keeps its own time may owe one at either end.
        ...inUse(isOut).map((sensor) =>
          figure(Math.min(100, (100 * (this.#came[sensor]! + 1)) / (this.#sweeps / this.#period[sensor]!)), {
            name: "readings received",
            sensor,
            unit: "%",
            digits: 2,
            least,
            advice: "check its plug and cable, or take it out on purpose",
          }),
        ),
      ],
      faults: [],
      notes: [],
    };
  }
}

function badOf({ badChecksum, overLong, notUnderstood }: LinkReadings["counters"]): number {
  return badChecksum + overLong + notUnderstood;
}
