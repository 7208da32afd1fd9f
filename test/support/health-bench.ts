/** A Health room on a synthetic rig: run it, spoil readings, see which flags come and go. */
import { readFileSync } from "node:fs";
import { FlagBook } from "../../bridge/health/flag-book.ts";
import { Health } from "../../bridge/health/health.ts";
import type { ExpectedField } from "../../bridge/health/setup.ts";
import { type Thresholds, thresholdsSchema } from "../../bridge/rig/thresholds.ts";
import type { Sweep } from "../../bridge/sweep.ts";
import type { Flag } from "../../bridge/wire/flag.ts";
import { type SyntheticOptions, SyntheticRig } from "./synthetic-sweeps.ts";

export const THRESHOLDS: Thresholds = thresholdsSchema.parse(
  JSON.parse(readFileSync(new URL("../../config/thresholds.json", import.meta.url), "utf8")),
);

/** The synthetic rig's own field. */
export const SITE: ExpectedField = { normUT: 50, dipRad: (69 * Math.PI) / 180 };

export interface BenchOptions extends SyntheticOptions {
  readonly expectedField?: ExpectedField | null;
  readonly thresholds?: Partial<Thresholds>;
  /** Own rates by sensor. */
  readonly rates?: Readonly<Record<number, number>>;
}

export class HealthBench {
  readonly rig: SyntheticRig;
  readonly book: FlagBook;
  readonly health: Health;
  /** The synthetic orientations are the true ones. */
  readonly #exact: Float64Array;
  /** Every flag raised, in order. */
  readonly flags: Flag[] = [];

  constructor(options: BenchOptions = {}) {
    this.rig = new SyntheticRig(options);
    const sensors = Array.from({ length: this.rig.sweep.sensorCount }, (_, i) => ({
      name: `S${i + 1}`,
      station: (i + 0.5) / this.rig.sweep.sensorCount,
      model: this.rig.model,
      rateHz: options.rates?.[i],
    }));
    this.#exact = new Float64Array(sensors.length);
    this.book = new FlagBook(sensors, { onRaised: (flag) => this.flags.push(flag) });
    this.health = new Health({
      sensors,
      rateHz: this.rig.rateHz,
      // All but a point: the synthetic sway obeys no midline, so no length must be read into it.
      lengthM: 0.01,
      thresholds: { ...THRESHOLDS, ...options.thresholds },
      expectedField: options.expectedField === undefined ? SITE : options.expectedField,
      gravityMPerS2: null,
      book: this.book,
    });
  }

  get timeS(): number {
    return this.rig.sweep.timeS;
  }

  /** Runs for `seconds` of hub time. `spoil` sees each sweep before the health room does. */
  run(seconds: number, spoil?: (sweep: Sweep) => void): this {
    const count = Math.round(seconds * this.rig.rateHz);
    for (let k = 0; k < count; k++)
      this.health.observe(this.rig.next(spoil), this.rig.orientations, this.#exact);
    return this;
  }

  /** "kind@sensor" of every flag raised so far. */
  get raised(): string[] {
    return this.flags.map((flag) => `${flag.kind}@${flag.sensor}`);
  }

  get openNow(): string[] {
    return this.book.open.map((flag) => `${flag.kind}@${flag.sensor}`);
  }
}
