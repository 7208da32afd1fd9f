/**
 * Hub ticks and sequence numbers -> hub time, lost sweeps, and what to do with each sweep.
 *
 * The tick (32 bit, µs) wraps after 71.6 minutes, the sequence (16 bit) after 65,536 sweeps; either may wrap inside a gap.
 * What a hub sends is settled by its first sweep:
 *
 *     tick and sequence   time from the tick; lost sweeps from the sequence, and where that may have gone round more than
 *                         once, the count nearest to what the tick says. A sequence that claims more than four times the
 *                         sweeps the tick has room for is damaged: then the tick counts.
 *     tick only           time from the tick; lost = round(step x rate) - 1, so jitter below half an interval is no loss.
 *     sequence only       time = count / rate; lost from the sequence.
 *     neither             every sweep follows the one before: time = count / rate.
 *
 * Duplicate: same sequence and same tick as the last sweep. Late: tick behind by at most STRAY_US, and sequence behind
 * (by less than half its range). Both are dropped.
 *
 * A tick step is believed when it is at most STRAY_US; or when the sequence accounts for it; or when the arrivals on the
 * host do (which also counts whole rounds of the tick). Otherwise either the tick is damaged or the hub restarted:
 *
 *     the sequence goes on   the tick is damaged: time advances by the sequence, at the nominal rate, and the damaged tick
 *                            is not built upon. If the next tick follows the odd one, the hub has set its tick: it is
 *                            taken over, and time goes on.
 *     it does not            the hub restarted (or was away so long that nothing tells): time goes on, across a gap as
 *                            long as that between the arrivals, at least one interval.
 *
 * These are the only uses of host times, always the recorded ones: a replay gives the same answer. Two limits: a hub that
 * restarts within its first second looks like late sweeps until it is past where it was; and a restart that by chance
 * lands where sequence or tick were expected (about 1 in 200 at 200 Hz) passes as lost sweeps or as a damaged tick.
 */
import type { Sweep } from "../sweep.ts";

/** What became of a sweep. DUPLICATE and LATE are to be dropped; RESTARTED is the first after a restart of the hub. */
export const Admission = { NEXT: 0, DUPLICATE: 1, LATE: 2, RESTARTED: 3 } as const;
export type Admission = (typeof Admission)[keyof typeof Admission];

/** How many sweeps of each kind came, and how many did not. */
export interface ClockCounters {
  /** Admitted: NEXT and RESTARTED. */
  sweeps: number;
  /** Never arrived, or arrived late. */
  lost: number;
  duplicates: number;
  late: number;
  restarts: number;
  damagedTicks: number;
  /** Times the tick came round to zero: every 71.6 minutes, and no trouble. */
  tickWraps: number;
}

const TICK_SPAN_US = 2 ** 32;
const SEQUENCE_SPAN = 2 ** 16;
const SEQUENCE_MASK = SEQUENCE_SPAN - 1;
/**
 * How late a sweep may come, and how far a tick may stray from what sequence or arrivals account for. Cables and drivers
 * reorder within milliseconds; a host that is busy may stamp arrivals some tenths of a second late. Common practice, no
 * source.
 */
const STRAY_US = 1_000_000;
/** Sensors' own sampling clocks keep their nominal rate within 1 or 2 % (from memory of data sheets). */
const RATE_TOLERANCE = 0.02;
/** Crystals of hub and host differ by less than 0.02 %; this leaves room. */
const HOST_TOLERANCE = 0.001;
/** A hub that samples up to this many times faster than the rig file says is still understood. */
const RATE_SLIP = 4;

export class HubClock {
  readonly #counters: ClockCounters = {
    sweeps: 0,
    lost: 0,
    duplicates: 0,
    late: 0,
    restarts: 0,
    damagedTicks: 0,
    tickWraps: 0,
  };
  readonly #intervalUs: number;
  #hasTick = false;
  #hasSequence = false;
  #sequence = 0;
  /** The tick that belongs to #timeUs. */
  #tickUs = 0;
  /** The tick of the newest sweep where it was not believed, else -1. */
  #oddTickUs = -1;
  /** µs since the first sweep; whole numbers in a double, so exact, where ticks come. */
  #timeUs = 0;
  /** The time last given to a sweep; ahead of #timeUs only where ticks repeat. */
  #givenUs = 0;
  /** Intervals since the first sweep. */
  #count = 0;
  #hostTimeMs = 0;

  /** @param options.rateHz nominal sweeps a second, above 0 */
  constructor({ rateHz }: { rateHz: number }) {
    this.#intervalUs = 1e6 / rateHz;
  }

  get counters(): Readonly<ClockCounters> {
    return this.#counters;
  }

  /**
   * Places a sweep in time. Sets timeS (strictly increasing), stepS and lostBefore of a sweep that is NEXT or RESTARTED,
   * and leaves a dropped one alone. Reads sequence, tickUs and hostTimeMs.
   */
  admit(sweep: Sweep): Admission {
    if (this.#counters.sweeps === 0) return this.#start(sweep);
    const hostUs = (sweep.hostTimeMs - this.#hostTimeMs) * 1000;
    if (this.#hasTick) return this.#admitByTick(sweep, hostUs);
    if (this.#hasSequence) return this.#admitBySequence(sweep, hostUs);
    return this.#accept(sweep, Admission.NEXT, this.#intervalUs, 1);
  }

  /**
   * Hub time of another packet's tick, s: within 35.8 minutes of the newest sweep, before or after it.
   * Where sweeps carry no tick it is the newest sweep's time.
   */
  timeOf(tickUs: number): number {
    if (!this.#hasTick) return this.#givenUs / 1e6;
    return (this.#timeUs + ((tickUs - this.#tickUs) | 0)) / 1e6;
  }

  #start(sweep: Sweep): Admission {
    this.#hasTick = sweep.tickUs >= 0;
    this.#hasSequence = sweep.sequence >= 0;
    this.#sequence = sweep.sequence;
    this.#tickUs = sweep.tickUs;
    this.#hostTimeMs = sweep.hostTimeMs;
    this.#counters.sweeps = 1;
    sweep.timeS = 0;
    sweep.stepS = this.#intervalUs / 1e6;
    sweep.lostBefore = 0;
    return Admission.NEXT;
  }

  #admitByTick(sweep: Sweep, hostUs: number): Admission {
    const tickUs = sweep.tickUs;
    const ahead = this.#hasSequence ? (sweep.sequence - this.#sequence) & SEQUENCE_MASK : -1;
    const stepUs = (tickUs - this.#tickUs) >>> 0;
    // Where the arrivals agree, a tick has run on, past its end perhaps, rather than stood still or gone back.
    const confirmedUs = confirmedByHost(stepUs, TICK_SPAN_US, hostUs);
    if (stepUs === 0 && ahead <= 0 && confirmedUs <= 0) return this.#drop(Admission.DUPLICATE);
    const sequenceBehind = ahead < 0 || ahead >= SEQUENCE_SPAN / 2;
    const tickBehind = (this.#tickUs - tickUs) >>> 0 <= STRAY_US;
    if (sequenceBehind && tickBehind && confirmedUs < 0) return this.#drop(Admission.LATE);

    const believedUs = this.#believed(stepUs, ahead, hostUs);
    if (believedUs >= 0) return this.#acceptTick(sweep, believedUs, ahead);
    if (this.#oddTickUs >= 0) {
      const sinceOddUs = this.#believed((tickUs - this.#oddTickUs) >>> 0, ahead, hostUs);
      if (sinceOddUs >= 0) return this.#acceptTick(sweep, sinceOddUs, ahead);
    }
    const sequenceGoesOn = ahead > 0 && ahead * this.#intervalUs <= STRAY_US;
    const damaged = this.#hasSequence ? sequenceGoesOn : tickUs > this.#tickUs;
    return damaged ? this.#acceptDamaged(sweep, Math.max(1, ahead)) : this.#acceptRestart(sweep, hostUs);
  }

  #admitBySequence(sweep: Sweep, hostUs: number): Admission {
    const ahead = (sweep.sequence - this.#sequence) & SEQUENCE_MASK;
    const stepUs = ahead * this.#intervalUs;
    const confirmedUs = confirmedByHost(stepUs, SEQUENCE_SPAN * this.#intervalUs, hostUs);
    if (confirmedUs > 0)
      return this.#accept(sweep, Admission.NEXT, confirmedUs, Math.round(confirmedUs / this.#intervalUs));
    if (ahead === 0) return this.#drop(Admission.DUPLICATE);
    if ((SEQUENCE_SPAN - ahead) * this.#intervalUs <= STRAY_US) return this.#drop(Admission.LATE);
    if (stepUs > STRAY_US) return this.#acceptRestart(sweep, hostUs);
    return this.#accept(sweep, Admission.NEXT, stepUs, ahead);
  }

  /** The time that truly passed where a tick step is believed, whole rounds of the tick added; else -1. */
  #believed(stepUs: number, ahead: number, hostUs: number): number {
    const confirmedUs = confirmedByHost(stepUs, TICK_SPAN_US, hostUs);
    if (confirmedUs >= 0) return confirmedUs;
    if (stepUs <= STRAY_US) return stepUs;
    const countedUs = ahead * this.#intervalUs;
    return ahead > 0 && Math.abs(stepUs - countedUs) <= STRAY_US + RATE_TOLERANCE * countedUs ? stepUs : -1;
  }

  #acceptTick(sweep: Sweep, stepUs: number, ahead: number): Admission {
    // As many as it takes to get `stepUs` behind this tick.
    this.#counters.tickWraps += Math.ceil((stepUs - sweep.tickUs) / TICK_SPAN_US);
    this.#tickUs = sweep.tickUs;
    this.#oddTickUs = -1;
    return this.#accept(sweep, Admission.NEXT, stepUs, this.#intervalsIn(stepUs, ahead));
  }

  #acceptDamaged(sweep: Sweep, intervals: number): Admission {
    const stepUs = Math.round(intervals * this.#intervalUs);
    this.#tickUs = (this.#tickUs + stepUs) >>> 0;
    this.#oddTickUs = sweep.tickUs;
    this.#counters.damagedTicks++;
    return this.#accept(sweep, Admission.NEXT, stepUs, intervals);
  }

  #acceptRestart(sweep: Sweep, hostUs: number): Admission {
    const gapUs = Math.round(Math.max(this.#intervalUs, hostUs));
    this.#tickUs = sweep.tickUs;
    this.#oddTickUs = -1;
    this.#counters.restarts++;
    return this.#accept(sweep, Admission.RESTARTED, gapUs, Math.max(1, Math.round(gapUs / this.#intervalUs)));
  }

  /** Intervals since the sweep before, at least 1. */
  #intervalsIn(stepUs: number, ahead: number): number {
    const byTick = stepUs / this.#intervalUs;
    if (ahead >= 0) {
      const bySequence = ahead + SEQUENCE_SPAN * Math.round((byTick - ahead) / SEQUENCE_SPAN);
      if (bySequence >= 1 && bySequence <= RATE_SLIP * (byTick + 1)) return bySequence;
    }
    return Math.max(1, Math.round(byTick));
  }

  #accept(sweep: Sweep, admission: Admission, stepUs: number, intervals: number): Admission {
    this.#count += intervals;
    this.#timeUs = this.#hasTick ? this.#timeUs + stepUs : this.#count * this.#intervalUs;
    // Ticks coarser than the interval repeat: the least step is the tick's own resolution.
    const timeUs = Math.max(this.#timeUs, this.#givenUs + 1);
    sweep.timeS = timeUs / 1e6;
    sweep.stepS = (timeUs - this.#givenUs) / 1e6;
    sweep.lostBefore = intervals - 1;
    this.#givenUs = timeUs;
    this.#sequence = sweep.sequence;
    this.#hostTimeMs = sweep.hostTimeMs;
    this.#counters.sweeps++;
    this.#counters.lost += intervals - 1;
    return admission;
  }

  #drop(admission: typeof Admission.DUPLICATE | typeof Admission.LATE): Admission {
    if (admission === Admission.DUPLICATE) this.#counters.duplicates++;
    else this.#counters.late++;
    return admission;
  }
}

/** A step of a counter that wraps every `spanUs`, whole rounds added, where the arrivals agree with it; else -1. */
function confirmedByHost(stepUs: number, spanUs: number, hostUs: number): number {
  const rounds = Math.max(0, Math.round((hostUs - stepUs) / spanUs));
  const elapsedUs = stepUs + rounds * spanUs;
  return Math.abs(hostUs - elapsedUs) <= STRAY_US + HOST_TOLERANCE * elapsedUs ? elapsedUs : -1;
}
