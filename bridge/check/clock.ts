/** Clock: whether the hub counts time evenly, from when the check begins until it ends. */
import type { Sweep } from "../sweep.ts";
import { type CheckSetup, type Finding, figure, type LinkReadings, type Step } from "./step.ts";

export class ClockStep implements Step {
  readonly toDo = "Leave everything running while the hub's clock is compared with the computer's.";
  readonly #setup: CheckSetup;
  readonly #before: { readonly restarts: number; readonly disorder: number };
  #beganS = Number.NaN;
  #timeS = Number.NaN;

  constructor(setup: CheckSetup) {
    const { clock } = setup.readings();
    this.#setup = setup;
    this.#before = { restarts: clock.restarts, disorder: disorderOf(clock) };
  }

  observe({ timeS }: Sweep): void {
    if (Number.isNaN(this.#beganS)) this.#beganS = timeS;
    this.#timeS = timeS;
  }

  finding(): Finding {
    const { limits, readings } = this.#setup;
    const { clock, driftPpm } = readings();
    const watchedS = Number.isNaN(this.#beganS) ? 0 : this.#timeS - this.#beganS;
    const share = Math.min(driftPpm === null ? 0.99 : 1, watchedS / limits.clockS);
    const text = `compared for ${Math.floor(watchedS)} s, ${limits.clockS} s are needed`;
    return {
      share,
      missing: share < 1 ? [{ sensor: -1, text }] : [],
      figures: [
        figure(driftPpm ?? Number.NaN, {
          name: "drift",
          unit: "ppm",
          digits: 0,
          least: -limits.clockDriftPpm,
          most: limits.clockDriftPpm,
          advice: "let the hub reach its temperature; if it stays, its clock is unfit",
        }),
        figure(clock.restarts - this.#before.restarts, {
          name: "restarts",
          unit: "",
          digits: 0,
          most: 0,
          advice: "check the hub's supply, then repeat this step",
        }),
        figure(disorderOf(clock) - this.#before.disorder, {
          name: "ticks out of order",
          unit: "",
          digits: 0,
          most: 0,
          advice: "something between hub and computer repeats or reorders packets, or the hub's clock jumps",
        }),
      ],
      faults: [],
      notes: [],
    };
  }
}

/** Late and repeated sweeps, and ticks that jumped. */
function disorderOf({ late, duplicates, damagedTicks }: LinkReadings["clock"]): number {
  return late + duplicates + damagedTicks;
}
