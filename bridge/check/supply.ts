/** Supply: the hub's voltage, temperature and fault bits, from when the check begins until it ends. */
import type { HubStatus } from "../link/packets.ts";
import type { CheckReason } from "../wire/check.ts";
import { type CheckSetup, type Finding, figure, type Step } from "./step.ts";

/** Status packets that are enough, and how many the trace keeps at most. */
const LEAST_PACKETS = 3;
const MOST_TRACED = 400;

/** Bits of the status packet (link/packets.ts). */
const FAULTS = [
  [1, "the hub says its supply is low: charge or change the battery, check its cable"],
  [2, "the hub cannot read its sensor bus: check plugs and cables along the body"],
  [4, "the hub's buffer overran: choose a faster baud rate or fewer sweeps"],
  [8, "the hub was restarted by its watchdog: check its supply and firmware"],
] as const;

/** Hub time, s; V; °C. */
export type SupplyPoint = readonly [number, number | null, number | null];

export class SupplyStep implements Step {
  readonly toDo = "Leave the hub on the supply that it will have.";
  readonly notNeeded: string | undefined;
  /** The course, thinned. */
  trace: SupplyPoint[] = [];
  readonly #setup: CheckSetup;
  #packets = 0;
  #every = 1;
  #lowestV = Number.POSITIVE_INFINITY;
  #coldestC = Number.POSITIVE_INFINITY;
  #hottestC = Number.NEGATIVE_INFINITY;
  #faults = 0;

  constructor(setup: CheckSetup) {
    this.#setup = setup;
    this.notNeeded = setup.hasStatus ? undefined : "This hub's packets carry no supply: it is not watched.";
  }

  observe(): void {}

  status({ supplyV, temperatureC, faults }: HubStatus, timeS: number): void {
    if (this.#packets % this.#every === 0) {
      this.trace.push([round(timeS, 2)!, round(supplyV, 3), round(temperatureC, 1)]);
      if (this.trace.length > MOST_TRACED) {
        this.trace = this.trace.filter((_, k) => k % 2 === 0);
        this.#every *= 2;
      }
    }
    this.#packets++;
    if (supplyV < this.#lowestV) this.#lowestV = supplyV;
    if (temperatureC < this.#coldestC) this.#coldestC = temperatureC;
    if (temperatureC > this.#hottestC) this.#hottestC = temperatureC;
    this.#faults |= faults;
  }

  finding(): Finding {
    const { limits } = this.#setup;
    const faults: CheckReason[] = FAULTS.filter(([bit]) => (this.#faults & bit) !== 0).map(([, text]) => ({
      sensor: -1,
      text,
    }));
    const share = Math.min(1, this.#packets / LEAST_PACKETS);
    const text = `${this.#packets} status packets came, ${LEAST_PACKETS} are needed`;
    return {
      share,
      missing: share < 1 ? [{ sensor: -1, text }] : [],
      figures: [
        figure(this.#lowestV, {
          name: "lowest supply",
          unit: "V",
          digits: 2,
          least: limits.supplyLeastV,
          advice: "charge or change the battery, check the supply's cable",
        }),
        figure(this.#coldestC, {
          name: "coldest",
          unit: "°C",
          digits: 1,
          least: limits.temperatureLeastC,
          advice: "let the hub warm up, and look for water in it",
        }),
        figure(this.#hottestC, {
          name: "hottest",
          unit: "°C",
          digits: 1,
          most: limits.temperatureMostC,
          advice: "let the hub cool, and look for a short circuit or water in it",
        }),
      ],
      faults,
      notes: [],
    };
  }
}

function round(value: number, digits: number): number | null {
  return Number.isFinite(value) ? Number(value.toFixed(digits)) : null;
}
