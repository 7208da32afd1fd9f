/**
 * The stages joined: bytes in, flags and midline out. Read it top to bottom.
 *
 *     bytes -> link -> clock -> calibration -> health -> fusion -> body -> wave -> drive -> ring buffer
 *
 * Everything is computed from the hub's own ticks, so the same bytes give the same results at any speed and cut into any
 * chunks. Arrival times, as recorded, serve four things only: noticing a silent link, bridging a restart of the hub,
 * telling whether a gap is longer than the hub's counters can say, and how fast the hub's clock runs against the host's.
 */
import type { HeadMotion } from "./body/head-motion.ts";
import type { Midline } from "./body/midline.ts";
import { TravelAxis } from "./body/travel-axis.ts";
import { Calibration } from "./calibration/calibration.ts";
import { DriftMeter } from "./clock/drift.ts";
import { Admission, HubClock } from "./clock/hub-clock.ts";
import { SilenceWatch } from "./clock/silence.ts";
import { CameraComparison } from "./drive/camera-comparison.ts";
import type { CameraTrack } from "./drive/camera-track.ts";
import type { DriveComparison } from "./drive/drive-comparison.ts";
import type { ChainFusion } from "./fusion/chain-fusion.ts";
import { FlagBook } from "./health/flag-book.ts";
import { HeadingFallback } from "./health/heading-fallback.ts";
import type { Health } from "./health/health.ts";
import { createDecoder } from "./link/decoder.ts";
import type { HubStatus, LinkCounters, PacketDecoder } from "./link/packets.ts";
import type { Rig } from "./rig/load.ts";
import {
  driveOf,
  fusionOf,
  gaitOf,
  headMotionOf,
  healthOf,
  midlineOf,
  ringOf,
  stationsOf,
} from "./stages.ts";
import type { Sweep } from "./sweep.ts";
import type { TrialRing } from "./trial/ring.ts";
import type { GaitMeter } from "./wave/gait.ts";
import type { GaitCycle } from "./wave/gait-cycle.ts";
import { Rhythm } from "./wave/rhythm.ts";
import type { Bout } from "./wave/steady-bout.ts";
import type { TailbeatMeter } from "./wave/tailbeat.ts";
import type { Flag, Mark } from "./wire/flag.ts";
import type { Choice, HeadingView } from "./wire/messages.ts";

/** No sweep for this long is a silent link, be it that nothing comes or that nothing can be read. */
const SILENCE_MS = 300;
/** The drive's readings belong to the sweeps about them: one further off has a damaged tick, or its hub has restarted, s. */
const REFERENCE_STRAY_S = 2;

const HEADING_MARKS: Record<HeadingView, string> = {
  magnetic: "Heading held by the magnetometers",
  relative: "Heading held by the body",
  free: "Heading free: gyroscopes only",
};

/** What a run tells whoever watches it. Records are borrowed. */
export interface PipelineObserver {
  /** A sweep went through all stages. */
  sweep?(sweep: Sweep): void;
  flag?(flag: Flag, change: "raised" | "changed" | "ended"): void;
  /** A tailbeat cycle is complete. */
  beat?(cycle: GaitCycle): void;
  /** A bout of steady swimming has ended. */
  bout?(bout: Bout): void;
  mark?(mark: Mark): void;
  /** What the drive did at a sweep's time, some sweeps later: rad and m, as the rig file puts them right. */
  reference?(timeS: number, yaw: number, sway: number): void;
  /** The hub's housekeeping, at the newest sweep's time, s. */
  status?(status: HubStatus, timeS: number): void;
  /** A camera frame's time, hub s. */
  sync?(timeS: number, edge: number): void;
}

export interface PipelineOptions {
  /** Day of the trial, for the World Magnetic Model. */
  readonly startedAt: Date;
  readonly observer?: PipelineObserver;
  /** false leaves the ring buffer out: an export needs no looking back. */
  readonly ring?: boolean;
  /** Midlines that a camera saw in this trial, laid upon ours. */
  readonly camera?: CameraTrack | undefined;
}

export class Pipeline {
  readonly rig: Rig;
  readonly clock: HubClock;
  /** For the display and its flag: nothing is computed from it. */
  readonly drift = new DriftMeter();
  readonly flags: FlagBook;
  readonly health: Health;
  readonly fusion: ChainFusion;
  readonly rhythm: Rhythm;
  readonly midline: Midline;
  /** null where the rig file has the nose fixed. */
  readonly headMotion: HeadMotion | null;
  readonly travel: TravelAxis;
  readonly gait: GaitMeter;
  readonly tailbeat: TailbeatMeter;
  /** null where the rig file names no drive. */
  readonly drive: DriveComparison | null;
  /** null where no table of a camera's midlines was loaded. */
  readonly camera: CameraComparison | null;
  /** The drive's newest reading as it came, rad and m; NaN before the first. */
  readonly newestReference = { yaw: Number.NaN, sway: Number.NaN };
  readonly ring: TrialRing | null;
  /** What is to hold the headings: the rig file's word until the operator chooses. */
  chosenHeading: HeadingView;
  /** Sweeps that went through all stages. */
  sweepCount = 0;
  /** Hub time of the newest sweep, s. */
  timeS = 0;
  /** Arrival of its last byte, ms since the epoch. */
  hostTimeMs = 0;

  readonly #observer: PipelineObserver;
  readonly #calibration: Calibration;
  readonly #decoder: PacketDecoder;
  readonly #fallback: HeadingFallback;
  readonly #silence = new SilenceWatch(SILENCE_MS);
  #badPackets = 0;

  constructor(rig: Rig, { startedAt, observer = {}, ring = true, camera }: PipelineOptions) {
    const { sensors } = rig;
    const { rateHz } = rig.hub;
    this.rig = rig;
    this.chosenHeading = rig.heading;
    this.#observer = observer;
    this.#decoder = createDecoder(rig, {
      sweep: (sweep) => this.#sweep(sweep),
      hello: () => {},
      status: (status) => this.#status(status),
      reference: ({ tickUs, yaw, sway }) => this.#reference(tickUs, yaw, sway),
      sync: ({ tickUs, edge }) => observer.sync?.(this.clock.timeOf(tickUs), edge),
      button: ({ tickUs, button }) => this.#button(tickUs, button),
    });
    this.clock = new HubClock({ rateHz });
    this.#calibration = new Calibration(sensors);
    this.flags = new FlagBook(sensors, {
      onRaised: (flag) => observer.flag?.(flag, "raised"),
      onChanged: (flag) => observer.flag?.(flag, "changed"),
      onEnded: (flag) => observer.flag?.(flag, "ended"),
    });
    this.health = healthOf(rig, startedAt, this.flags);
    this.fusion = fusionOf(rig);
    this.#fallback = new HeadingFallback(this.flags);
    this.rhythm = new Rhythm(stationsOf(rig));
    this.midline = midlineOf(rig);
    this.travel = new TravelAxis(rateHz);
    this.headMotion = headMotionOf(rig);
    this.gait = gaitOf(rig, {
      onCycle: (cycle) => observer.beat?.(cycle),
      onBout: (bout) => observer.bout?.(bout),
    });
    this.tailbeat = this.gait.tailbeat;
    this.drive = driveOf(rig, (timeS, yaw, sway) => observer.reference?.(timeS, yaw, sway));
    this.camera = camera ? new CameraComparison(camera, rateHz) : null;
    this.ring = ring ? ringOf(rig) : null;
  }

  /** A chunk of bytes as it arrived, of any size. */
  bytes(chunk: Uint8Array, hostTimeMs: number): void {
    this.hostTime(hostTimeMs);
    this.#decoder.push(chunk, hostTimeMs);
  }

  /** Host time passes, with or without bytes: a link that gives no sweeps is noticed. */
  hostTime(hostTimeMs: number): void {
    this.#silence.hostTime(hostTimeMs);
    if (this.#silence.silent && this.sweepCount > 0)
      this.health.linkSilent(true, this.timeS + SILENCE_MS / 1000);
  }

  /** What the operator should know about a hub that does not fit the rig, or null. */
  get complaint(): string | null {
    return this.#decoder.complaint;
  }

  /** A mark by the operator, at the newest sweep's time. */
  mark(text: string, from: Mark["from"]): Mark {
    const mark: Mark = { timeS: this.timeS, text, from };
    this.#observer.mark?.(mark);
    return mark;
  }

  /** The operator's choice. It takes effect gradually, so nothing jumps; a mark tells of it. */
  choose({ heading }: Choice): void {
    if (heading === this.chosenHeading) return;
    this.chosenHeading = heading;
    this.#fallback.leave(this.timeS);
    this.fusion.setHeading(heading);
    this.mark(HEADING_MARKS[heading], "operator");
  }

  /** The run is over: open flags and a steady bout end with it. */
  finish(): void {
    this.gait.finish();
    this.flags.endAll(this.timeS);
  }

  get counters(): Readonly<LinkCounters> {
    return this.#decoder.counters;
  }

  get silent(): boolean {
    return this.#silence.silent;
  }

  #sweep(sweep: Sweep): void {
    const admission = this.clock.admit(sweep);
    if (admission === Admission.DUPLICATE || admission === Admission.LATE) {
      this.health.sweepDropped(admission === Admission.LATE ? "late" : "duplicate");
      return;
    }
    this.#silence.bytesArrived(sweep.hostTimeMs);
    this.drift.observe(sweep.timeS, sweep.hostTimeMs);
    this.health.clockDrift(sweep.timeS, this.drift.ppm);
    this.#reportBadPackets(sweep.timeS);
    if (admission === Admission.RESTARTED) this.health.hubRestarted(sweep.timeS);
    this.#calibration.apply(sweep);
    this.health.observe(sweep, this.fusion.orientations, this.fusion.inclinationSigma);
    if (this.chosenHeading === "magnetic")
      this.fusion.setHeading(this.#fallback.observe(sweep.timeS) ? "relative" : "magnetic");
    this.fusion.step(sweep);
    this.health.compareOnBoard(sweep.timeS, this.fusion.onBoard.tilt, this.fusion.onBoard.turn);
    this.rhythm.step(sweep, this.fusion.orientations, this.fusion.trust);
    this.midline.step(this.fusion.orientations, this.fusion.trust, sweep.stepS, this.rhythm);
    this.travel.step(sweep.stepS, this.midline.positions, this.tailbeat.periodS);
    this.headMotion?.step(
      sweep,
      this.fusion.orientations,
      this.fusion.trust,
      this.rhythm,
      this.travel.direction,
      this.midline.positions,
    );
    this.gait.step(sweep.timeS, this.midline.positions, this.travel.direction, this.fusion.trust);
    const { orientations, trust } = this.fusion;
    this.drive?.sweep(sweep.timeS, orientations, trust, this.midline.positions, this.travel.heading);
    this.camera?.sweep(sweep.timeS, this.midline.positions, this.travel.heading);
    this.ring?.push(sweep, this.fusion.orientations, this.fusion.trust, this.midline.positions);
    this.timeS = sweep.timeS;
    this.hostTimeMs = sweep.hostTimeMs;
    this.sweepCount++;
    this.#observer.sweep?.(sweep);
  }

  #reference(tickUs: number, yaw: number, sway: number): void {
    this.newestReference.yaw = yaw;
    this.newestReference.sway = sway;
    const timeS = this.clock.timeOf(tickUs);
    if (this.sweepCount === 0 || Math.abs(timeS - this.timeS) > REFERENCE_STRAY_S) return;
    this.drive?.reference(timeS, yaw, sway);
  }

  #status(status: HubStatus): void {
    // At the newest sweep's time: its own tick says nothing until the first sweep after a restart has come.
    if (this.sweepCount === 0) return;
    this.health.hubStatus(this.timeS, status);
    this.#observer.status?.(status, this.timeS);
  }

  #button(tickUs: number, button: number): void {
    this.#observer.mark?.({ timeS: this.clock.timeOf(tickUs), text: `Button ${button}`, from: "hub button" });
  }

  /** Told at the sweep that follows them, so that it does not depend on how the bytes were cut. */
  #reportBadPackets(timeS: number): void {
    const { badChecksum, overLong, notUnderstood } = this.#decoder.counters;
    const bad = badChecksum + overLong + notUnderstood;
    if (bad === this.#badPackets) return;
    this.health.corruption(bad - this.#badPackets, timeS);
    this.#badPackets = bad;
  }
}
