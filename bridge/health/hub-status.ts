/**
 * What the hub says of itself in its status packets: supply, temperature, and faults it has noticed. Each packet is a
 * reading; a hub that sends none is not judged.
 */
import type { FlagKind, Severity } from "../wire/flag.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";

/** As in a status packet; NaN for a number that the layout has not. */
export interface HubReport {
  readonly supplyV: number;
  readonly temperatureC: number;
  /** Bits as in HUB_FAULTS. */
  readonly faults: number;
}

const SUPPLY_LOW = 1;
/** Fault bits besides the supply's, gravest first. */
const HUB_FAULTS: readonly { readonly bit: number; readonly says: string; readonly severity: Severity }[] = [
  { bit: 2, says: "the bus to the sensors fails", severity: "alarm" },
  { bit: 4, says: "its buffer overran", severity: "caution" },
  { bit: 8, says: "its watchdog restarted it", severity: "caution" },
];
const KNOWN_BITS = 15;

/** Calm again only when so far inside the limit: V and °C. */
const SUPPLY_RELEASE_V = 0.05;
const TEMPERATURE_RELEASE_C = 2;
/** In order for so long, s: status comes about twice a second. */
const QUIET_S = 1;
/** Below this share of the least supply the hub may stop any moment. */
const ALARM_SUPPLY = 0.95;

const SUPPLY = 0;
const TEMPERATURE = 1;
const FAULT = 2;

export class HubStatusWatch {
  readonly #setup: HealthSetup;
  readonly #state = new Hysteresis(3, 0, QUIET_S);

  constructor(setup: HealthSetup) {
    this.#setup = setup;
  }

  /** A status packet has come. @param timeS hub time, s */
  observe(timeS: number, { supplyV, temperatureC, faults }: HubReport): void {
    const { supplyLeastV, temperatureLeastC, temperatureMostC } = this.#setup.thresholds;
    const saysLow = (faults & SUPPLY_LOW) !== 0;
    if (!Number.isNaN(supplyV) || saysLow) {
      const severity = supplyV < ALARM_SUPPLY * supplyLeastV ? "alarm" : "caution";
      const detail = Number.isNaN(supplyV) ? "the hub says so" : `supply ${supplyV.toFixed(2)} V`;
      const low = saysLow || supplyV < supplyLeastV;
      const calm = !saysLow && supplyV >= supplyLeastV + SUPPLY_RELEASE_V;
      this.#tell(SUPPLY, "supply low", timeS, low, calm, severity, detail);
    }
    if (!Number.isNaN(temperatureC)) {
      const out = Math.max(temperatureLeastC - temperatureC, temperatureC - temperatureMostC);
      const detail = `hub at ${temperatureC.toFixed(0)} °C`;
      const calm = out <= -TEMPERATURE_RELEASE_C;
      this.#tell(TEMPERATURE, "hub temperature", timeS, out > 0, calm, "caution", detail);
    }
    const said = HUB_FAULTS.filter(({ bit }) => (faults & bit) !== 0);
    const others = faults & ~KNOWN_BITS;
    const details = [...said.map(({ says }) => says), ...(others === 0 ? [] : [`fault bits ${others}`])];
    const bad = details.length > 0;
    this.#tell(FAULT, "hub fault", timeS, bad, !bad, said[0]?.severity ?? "caution", details.join("; "));
  }

  #tell(
    row: number,
    kind: FlagKind,
    timeS: number,
    bad: boolean,
    calm: boolean,
    severity: Severity,
    detail: string,
  ): void {
    const { book } = this.#setup;
    const turn = this.#state.step(row, timeS, bad, calm);
    if (turn === Turn.REPORT && bad) book.raise(kind, -1, severity, this.#state.sinceS[row]!, detail);
    else if (turn === Turn.END) book.clear(kind, -1, this.#state.lastBadS[row]!);
  }
}
