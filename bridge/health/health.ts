/**
 * Health: whether every sensor can be believed. The detectors, in the order they run; each looks at a sweep, sets its
 * condition bits and writes its flags into the book.
 *
 * To add one: a file with a class that has `observe(sweep)`, its kind in wire/flag.ts, its sentence in advice.ts, its
 * threshold with a reason in rig/thresholds.ts and config/thresholds.json, a line below, and a test that injects exactly
 * that fault and expects exactly that flag.
 */
import type { Sweep } from "../sweep.ts";
import { AlternatingField } from "./alternating-field.ts";
import { AtRest } from "./at-rest.ts";
import { ClockDrift } from "./clock-drift.ts";
import { CorruptPackets } from "./corrupt-packets.ts";
import { Delivery } from "./delivery.ts";
import { FlippedSensors } from "./flipped.ts";
import { Headroom } from "./headroom.ts";
import { type HubReport, HubStatusWatch } from "./hub-status.ts";
import { MagneticInterference } from "./magnetic.ts";
import { MountingChange } from "./mounting-change.ts";
import { OnBoardDifference } from "./on-board.ts";
import { DUPLICATE, LATE, OutOfOrder } from "./out-of-order.ts";
import { HubRestarts, ReadErrors } from "./read-errors.ts";
import type { RestMeter } from "./rest-meter.ts";
import { Saturation } from "./saturation.ts";
import type { HealthSetup } from "./setup.ts";
import { Silence } from "./silence.ts";
import { StuckAxes } from "./stuck.ts";
import { SwappedSensors } from "./swapped.ts";

export class Health {
  readonly #silence: Silence;
  readonly #restarts: HubRestarts;
  readonly #corrupt: CorruptPackets;
  readonly #outOfOrder: OutOfOrder;
  readonly #clockDrift: ClockDrift;
  readonly #readErrors: ReadErrors;
  readonly #delivery: Delivery;
  readonly #saturation: Saturation;
  readonly #headroom: Headroom;
  readonly #stuck: StuckAxes;
  readonly #magnetic: MagneticInterference;
  readonly #alternating: AlternatingField;
  readonly #atRest: AtRest;
  readonly #mounting: MountingChange;
  readonly #flipped: FlippedSensors;
  readonly #swapped: SwappedSensors;
  readonly #onBoard: OnBoardDifference;
  readonly #hubStatus: HubStatusWatch;

  constructor(setup: HealthSetup) {
    this.#silence = new Silence(setup);
    this.#restarts = new HubRestarts(setup);
    this.#corrupt = new CorruptPackets(setup);
    this.#outOfOrder = new OutOfOrder(setup);
    this.#clockDrift = new ClockDrift(setup);
    this.#readErrors = new ReadErrors(setup);
    this.#delivery = new Delivery(setup);
    this.#saturation = new Saturation(setup);
    this.#headroom = new Headroom(setup);
    this.#stuck = new StuckAxes(setup);
    this.#magnetic = new MagneticInterference(setup);
    this.#alternating = new AlternatingField(setup);
    this.#atRest = new AtRest(setup);
    this.#mounting = new MountingChange(setup);
    this.#flipped = new FlippedSensors(setup);
    this.#swapped = new SwappedSensors(setup);
    this.#onBoard = new OnBoardDifference(setup);
    this.#hubStatus = new HubStatusWatch(setup);
  }

  /**
   * Looks at one admitted sweep (late and duplicate ones never get here), calibrated but not yet fused; sets
   * `sweep.conditions`.
   * @param orientations body axes to earth as fused with the sweep before, scalar first, sensors x 4
   * @param inclinationSigma standard deviation of their inclinations, rad, by sensor
   */
  observe(sweep: Sweep, orientations: Float64Array, inclinationSigma: Float64Array): void {
    // What explains a loss comes before the loss; what breaks a reading comes before what is read from it.
    const restarted = this.#restarts.observe(sweep);
    const endsSilence = this.#silence.observe(sweep);
    const uncorrupted = this.#corrupt.observe(sweep);
    this.#outOfOrder.observe(sweep.timeS);
    this.#readErrors.observe(sweep);
    this.#delivery.observe(sweep, endsSilence || restarted ? 0 : uncorrupted);
    this.#saturation.observe(sweep);
    this.#headroom.observe(sweep);
    this.#stuck.observe(sweep);
    this.#magnetic.observe(sweep, orientations, inclinationSigma);
    this.#alternating.observe(sweep, orientations);
    this.#atRest.observe(sweep);
    this.#mounting.observe(sweep, orientations);
    this.#swapped.observe(sweep);
    this.#flipped.observe(sweep, this.#swapped.outOfOrder);
  }

  /**
   * After fusion of the same sweep: how far orientations fused on board differ from ours.
   * @param tilt RMS difference of inclination by sensor, rad; NaN for none
   * @param turn of heading
   */
  compareOnBoard(timeS: number, tilt: Float64Array, turn: Float64Array): void {
    this.#onBoard.observe(timeS, tilt, turn);
  }

  /** No sweep has come for a while, or one has again; saying the same again changes nothing. @param timeS hub time, s */
  linkSilent(silent: boolean, timeS: number): void {
    this.#silence.linkSilent(silent, timeS);
    if (silent) this.#delivery.silent();
  }

  /** A status packet of the hub has come. @param timeS hub time, s */
  hubStatus(timeS: number, report: HubReport): void {
    this.#hubStatus.observe(timeS, report);
  }

  /** So many more packets were unreadable: told before the sweep that follows them, with its hub time, s. */
  corruption(deltaBad: number, timeS: number): void {
    this.#corrupt.corruption(deltaBad, timeS);
  }

  /** A sweep came twice, or after a later one, and was dropped: told before the sweep that follows it. */
  sweepDropped(what: "duplicate" | "late"): void {
    this.#outOfOrder.dropped(what === "late" ? LATE : DUPLICATE);
    if (what === "late") this.#delivery.cameLate();
  }

  /** The hub's clock against the computer's. @param ppm positive when the hub is fast; null while nothing is known */
  clockDrift(timeS: number, ppm: number | null): void {
    this.#clockDrift.observe(timeS, ppm);
  }

  /** The hub started anew: told before its first sweep, with that sweep's hub time, s. */
  hubRestarted(timeS: number): void {
    this.#restarts.restarted(timeS);
  }

  /** Share of the gyroscope's range that the last second left free, per sensor, 0 .. 1. */
  get gyroHeadroom(): Float64Array {
    return this.#headroom.gyro;
  }

  /** The same for the accelerometer. */
  get accelHeadroom(): Float64Array {
    return this.#headroom.accel;
  }

  /** Share by which the magnetic field is off, per sensor; NaN without magnetometer or before there is a reference. */
  get fieldOff(): Float64Array {
    return this.#magnetic.fieldOff;
  }

  /** What each sensor measures at rest: figures of its last window, of its last run, and its bias instability. */
  get rest(): RestMeter {
    return this.#atRest.meter;
  }

  /** Share of the readings due that came over the last 60 s, per sensor, 0 .. 1. */
  get delivered60(): Float64Array {
    return this.#delivery.delivered60;
  }

  /** Share of all readings lost over the last 60 s, 0 .. 1. */
  get lostShare60(): number {
    return this.#delivery.lostShare60;
  }

  /** Sweeps that came in the last second; 0 while the link is silent. */
  get sweepsPerS(): number {
    return this.#delivery.sweepsPerS;
  }
}
