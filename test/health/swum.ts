/** Detectors on a swimming body, straight from the simulated sensors; a test spoils readings as it likes. */
import { FlagBook } from "../../bridge/health/flag-book.ts";
import type { HealthSetup } from "../../bridge/health/setup.ts";
import { EARTH_FIELD_UT, SimulatedRig } from "../../bridge/rehearsal/simulated-rig.ts";
import { STEADY_SWIMMER, type SwimmerOptions } from "../../bridge/rehearsal/swimmer-options.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { CHANNELS, type Sweep } from "../../bridge/sweep.ts";
import type { Flag } from "../../bridge/wire/flag.ts";

export class Swum {
  readonly setup: HealthSetup;
  readonly flags: Flag[] = [];
  readonly #simulated: SimulatedRig;
  #index = 0;

  constructor(rigName: string, swimmer: Partial<SwimmerOptions> = {}, sensorCount?: number) {
    const whole = loadRig(rigName);
    const rig = { ...whole, sensors: whole.sensors.slice(0, sensorCount) };
    this.#simulated = new SimulatedRig({
      rig,
      seed: 4,
      faults: [],
      swimmer: { ...STEADY_SWIMMER, restS: 0.5, startS: 1, ...swimmer },
      earthFieldUT: EARTH_FIELD_UT,
    });
    this.setup = {
      sensors: rig.sensors.map((sensor, i) => ({ ...sensor, model: rig.models[i]! })),
      rateHz: rig.hub.rateHz,
      lengthM: rig.body.lengthMm / 1000,
      thresholds: rig.thresholds,
      expectedField: null,
      gravityMPerS2: null,
      book: new FlagBook(rig.sensors, { onRaised: (flag) => this.flags.push(flag) }),
    };
  }

  run(seconds: number, detector: (sweep: Sweep) => void, spoil: (sweep: Sweep) => void = () => {}): this {
    const { rateHz } = this.setup;
    for (let k = 0; k < seconds * rateHz; k++) {
      const sweep = this.#simulated.sweep(this.#index);
      sweep.timeS = this.#index++ / rateHz;
      sweep.stepS = 1 / rateHz;
      sweep.conditions.fill(0);
      spoil(sweep);
      sweep.values.set(sweep.raw);
      detector(sweep);
    }
    return this;
  }

  get raised(): string[] {
    return this.flags.map((flag) => `${flag.kind}@${flag.sensor}: ${flag.detail}`);
  }
}

/** Half a turn of sensor `i` about one of its axes, 0 x to 2 z. */
export function halfTurn(i: number, axis: number): (sweep: Sweep) => void {
  return ({ raw }) => {
    for (let k = 0; k < CHANNELS; k++) if (k % 3 !== axis) raw[i * CHANNELS + k]! *= -1;
  };
}

export function exchange(i: number, j: number): (sweep: Sweep) => void {
  return ({ raw }) => {
    const kept = raw.slice(i * CHANNELS, (i + 1) * CHANNELS);
    raw.copyWithin(i * CHANNELS, j * CHANNELS, (j + 1) * CHANNELS);
    raw.set(kept, j * CHANNELS);
  };
}
