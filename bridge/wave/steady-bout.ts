/** Bouts of steady swimming: cycles in a row that agree with each other. */
import { RunningSpread } from "../numeric/running-spread.ts";
import { GAIT_NUMBERS, type GaitNumber } from "../wire/gait.ts";
import type { GaitCycle } from "./gait-cycle.ts";

export interface SteadyCriterion {
  /** Each frequency stays within this share of the bout's mean, */
  readonly frequencyShare: number;
  /** each tail amplitude within this share, */
  readonly amplitudeShare: number;
  /** for at least so many cycles. */
  readonly cycles: number;
}

export interface Bout {
  /** Hub time, s. */
  readonly startS: number;
  endS: number;
  cycles: number;
  /** Of the numbers to be trusted. */
  readonly numbers: Readonly<Record<GaitNumber, RunningSpread>>;
}

export class SteadyBout {
  readonly #criterion: SteadyCriterion;
  // Of all cycles of the bout, doubted or not: what the next is held against.
  #frequency = new RunningSpread();
  #amplitude = new RunningSpread();
  #bout: Bout | null = null;

  constructor(criterion: SteadyCriterion) {
    this.#criterion = criterion;
  }

  /** Cycles in the bout under way; one alone agrees with itself. */
  get cycles(): number {
    return this.#bout?.cycles ?? 0;
  }

  /** Whether the bout under way has been going on for long enough. */
  get steady(): boolean {
    return this.cycles >= this.#criterion.cycles;
  }

  /**
   * Takes a cycle into the bout, or starts a new one with it when it lies too far from the mean of both.
   * @returns the bout that it brought to an end, if that was steady
   */
  add(cycle: GaitCycle): Bout | null {
    const agrees = this.#agrees(cycle);
    const ended = agrees ? null : this.end();
    this.#bout ??= newBout(cycle.startS);
    this.#frequency.add(cycle.numbers.frequencyHz);
    this.#amplitude.add(cycle.numbers.tailAmplitudeM);
    this.#bout.endS = cycle.endS;
    this.#bout.cycles++;
    for (const name of GAIT_NUMBERS) {
      if (cycle.doubts[name] === 0) this.#bout.numbers[name].add(cycle.numbers[name]);
    }
    return ended;
  }

  #agrees({ numbers }: GaitCycle): boolean {
    const { frequencyShare, amplitudeShare } = this.#criterion;
    return (
      isNear(numbers.frequencyHz, this.#frequency, frequencyShare) &&
      isNear(numbers.tailAmplitudeM, this.#amplitude, amplitudeShare)
    );
  }

  /** The body has stopped: the next cycle starts a new bout. @returns the one that ended, if it was steady */
  end(): Bout | null {
    const ended = this.steady ? this.#bout : null;
    this.#bout = null;
    this.#frequency = new RunningSpread();
    this.#amplitude = new RunningSpread();
    return ended;
  }
}

/** Whether `value` stays within `share` of the mean of itself and what `before` has taken in. */
function isNear(value: number, before: RunningSpread, share: number): boolean {
  if (before.count === 0) return true;
  const mean = before.mean + (value - before.mean) / (before.count + 1);
  return Math.abs(value - mean) <= share * mean;
}

function newBout(startS: number): Bout {
  const numbers = Object.fromEntries(GAIT_NUMBERS.map((name) => [name, new RunningSpread()]));
  return { startS, endS: startS, cycles: 0, numbers: numbers as Bout["numbers"] };
}
