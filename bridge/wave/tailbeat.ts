/**
 * Tailbeats while they happen, from the tail tip's excursion across the travel axis.
 *
 * A beat runs from one upward crossing of the mean line (tail going left) to the next. The mean line is the average over
 * the last beats, and while the body does not beat a slow running mean, so a body held bent has its own mean. A crossing
 * counts once the excursion has passed a threshold on the far side; its time is interpolated between the two sweeps that
 * straddle the line. The extremes of a beat come from the parabola through the highest (lowest) three sweeps.
 *
 * Times are hub times and may be unevenly spaced: lost sweeps cost accuracy, not beats.
 */

/** Threshold either side of the mean line, as a share of half the last beat's peak-to-peak amplitude: noise near the line makes no second crossing, and a tail that beats at a quarter of its last amplitude still counts. */
const THRESHOLD_SHARE = 0.2;
/** Least threshold, as a share of body length: a degree of orientation noise at the tail moves its tip by well under this. */
const LEAST_THRESHOLD_SHARE = 0.005;
/** The slowest beat waited for, s. Large animals cruise at a few tenths of a hertz (common practice, no source). */
export const SLOWEST_BEAT_S = 5;
/** No beat for this many periods of the last one: the body has stopped. Two, so that one beat may be missed. */
const PERIODS_TO_STOP = 2;
/** Time constant of the mean line while the body does not beat, s: shorter than a pose is held, longer than a slow half beat. */
const RESTING_MEAN_S = 2;
/** Weight of the newest beat in the mean line: the last two or three beats count. */
const MEAN_LINE_WEIGHT = 0.5;
/** One whole tailbeat cycle. */
export interface Beat {
  /** Hub time, s. */
  startS: number;
  /** Hub time, s. */
  endS: number;
  frequencyHz: number;
}

export interface TailbeatOptions {
  /** Body length, m. */
  readonly lengthM: number;
}

export class TailbeatMeter {
  readonly #leastThresholdM: number;
  readonly #lastBeat: Beat = { startS: 0, endS: 0, frequencyHz: 0 };
  /** Of the last beat, peak to peak, m. */
  #amplitudeM = 0;
  #anyBeat = false;

  #started = false;
  #startS = 0;
  #timeS = 0;
  /** Excursion in the last two sweeps, m. */
  #lateralM = 0;
  #lateralBeforeM = 0;

  #meanM = 0;
  /** Integral of the excursion since the beat began, m s. */
  #areaMS = 0;

  /** +1 left of the mean line, -1 right of it, 0 not yet known. */
  #side = 0;
  /** The newest upward crossing of the line, whether or not the threshold has been passed since. */
  #upwardS = Number.NaN;
  /** The upward crossing that began the beat under way; NaN when none is. */
  #beatStartS = Number.NaN;
  #highestM = Number.NEGATIVE_INFINITY;
  #lowestM = Number.POSITIVE_INFINITY;

  #beating = false;

  constructor({ lengthM }: TailbeatOptions) {
    this.#leastThresholdM = LEAST_THRESHOLD_SHARE * lengthM;
  }

  /** Of the last beat, s; null while the body does not beat. */
  get periodS(): number | null {
    return this.#beating ? 1 / this.#lastBeat.frequencyHz : null;
  }

  /** Of the last beat; null while the body does not beat. */
  get frequencyHz(): number | null {
    return this.#beating ? this.#lastBeat.frequencyHz : null;
  }

  /** Where in the present beat: 0 at the upward crossing, up to 1 at the next as expected; NaN while not beating. */
  get phase(): number {
    if (!this.#beating) return Number.NaN;
    return Math.min(1, Math.max(0, (this.#timeS - this.#beatStartS) * this.#lastBeat.frequencyHz));
  }

  /** The last whole beat, null before the first. Borrowed: one object is reused. */
  get lastBeat(): Readonly<Beat> | null {
    return this.#anyBeat ? this.#lastBeat : null;
  }

  /**
   * Takes one sweep.
   * @param timeS hub time, s, increasing
   * @param tailLateralM tail tip's excursion to the left of the travel axis, m
   * @returns true when this sweep ended a beat: `lastBeat` is new
   */
  step(timeS: number, tailLateralM: number): boolean {
    if (!this.#started) {
      this.#start(timeS, tailLateralM);
      return false;
    }
    const stepS = timeS - this.#timeS;
    this.#followMean(timeS, stepS, tailLateralM);
    this.#trackExtremes(tailLateralM);
    const ended = this.#crossLine(timeS, stepS, tailLateralM);
    this.#lateralBeforeM = this.#lateralM;
    this.#lateralM = tailLateralM;
    this.#timeS = timeS;
    if (!ended) this.#stopIfOverdue();
    return ended;
  }

  #start(timeS: number, tailLateralM: number): void {
    this.#started = true;
    this.#startS = timeS;
    this.#timeS = timeS;
    this.#meanM = tailLateralM;
    this.#lateralM = tailLateralM;
    this.#lateralBeforeM = tailLateralM;
  }

  #followMean(timeS: number, stepS: number, lateralM: number): void {
    this.#areaMS += 0.5 * (lateralM + this.#lateralM) * stepS;
    if (this.#beating) return; // moves at the end of each beat instead
    const memoryS = Math.min(timeS - this.#startS, RESTING_MEAN_S);
    this.#meanM += (1 - Math.exp(-stepS / memoryS)) * (lateralM - this.#meanM);
  }

  /** The parabola through three sweeps peaks above the middle one by at most an eighth of a step between them. */
  #trackExtremes(lateralM: number): void {
    const before = this.#lateralBeforeM;
    const middle = this.#lateralM;
    const bend = 2 * middle - before - lateralM;
    const vertex = bend === 0 ? middle : middle + (before - lateralM) ** 2 / (8 * bend);
    if (middle >= before && middle >= lateralM && vertex > this.#highestM) this.#highestM = vertex;
    if (middle <= before && middle <= lateralM && vertex < this.#lowestM) this.#lowestM = vertex;
  }

  #crossLine(timeS: number, stepS: number, lateralM: number): boolean {
    const before = this.#lateralM - this.#meanM;
    const now = lateralM - this.#meanM;
    if (before <= 0 && now > 0) this.#upwardS = timeS - (stepS * now) / (now - before);
    const threshold = this.#threshold();
    if (now < -threshold) this.#side = -1;
    if (now <= threshold || this.#side === 1) return false;
    const wasRight = this.#side === -1;
    this.#side = 1;
    return wasRight && this.#beginBeat(timeS, lateralM);
  }

  #threshold(): number {
    if (!this.#beating) return this.#leastThresholdM;
    return Math.max(this.#leastThresholdM, 0.5 * THRESHOLD_SHARE * this.#amplitudeM);
  }

  /** The tail has crossed the line upward for good: ends the beat that was under way, if any, and begins the next. */
  #beginBeat(timeS: number, lateralM: number): boolean {
    const startS = this.#beatStartS;
    const endS = this.#upwardS;
    const whole = !Number.isNaN(startS);
    // The area since the crossing belongs to the new beat; near the line its excursion is nearly a straight ramp.
    const newAreaMS = 0.5 * (this.#meanM + lateralM) * (timeS - endS);
    if (whole) this.#endBeat(startS, endS, this.#areaMS - newAreaMS);
    this.#areaMS = newAreaMS;
    this.#beatStartS = endS;
    this.#highestM = Number.NEGATIVE_INFINITY;
    this.#lowestM = Number.POSITIVE_INFINITY;
    return whole;
  }

  #endBeat(startS: number, endS: number, areaMS: number): void {
    const beat = this.#lastBeat;
    beat.startS = startS;
    beat.endS = endS;
    beat.frequencyHz = 1 / (endS - startS);
    this.#amplitudeM = this.#highestM - this.#lowestM;
    this.#anyBeat = true;
    this.#beating = true;
    this.#meanM += MEAN_LINE_WEIGHT * (areaMS / (endS - startS) - this.#meanM);
  }

  /** Forgets the beat under way once the next crossing is overdue, so that a pause is never counted as one long beat. */
  #stopIfOverdue(): void {
    const limitS = Math.min(SLOWEST_BEAT_S, PERIODS_TO_STOP * (this.periodS ?? SLOWEST_BEAT_S));
    if (Number.isNaN(this.#beatStartS) || this.#timeS - this.#beatStartS <= limitS) return;
    this.#beating = false;
    this.#side = 0;
    this.#beatStartS = Number.NaN;
  }
}
