/**
 * A run that is watched: source -> recorder and pipeline -> viewers. The recorder gets every byte before anything
 * interprets it. Single samples go by plain calls; RxJS carries what happens rarely: link, flags, marks, and the clock of
 * the display.
 */
import { BehaviorSubject, interval, merge, Observable, Subject, type Subscription, throttleTime } from "rxjs";
import type { CameraTrack } from "../drive/camera-track.ts";
import type { ByteSink, ByteSource, LinkState } from "../link/source.ts";
import { Pipeline, type PipelineObserver } from "../pipeline.ts";
import type { Rig } from "../rig/load.ts";
import { POINT_COUNT } from "../stages.ts";
import type { Sweep } from "../sweep.ts";
import type { TrialRecorder } from "../trial/recorder.ts";
import { softwareVersion } from "../version.ts";
import type { Flag, Mark } from "../wire/flag.ts";
import type {
  BridgeMessage,
  Choice,
  DashboardMessage,
  FlagsMessage,
  LinkView,
  MarksMessage,
  StatusMessage,
  WelcomeMessage,
} from "../wire/messages.ts";
import { watchDisk } from "./disk-watch.ts";
import { FrameWriter, Strip } from "./display.ts";
import { cameraMessage, driveMessage } from "./drive-view.ts";
import { every } from "./every.ts";
import { StreamServer } from "./server.ts";
import { tailbeatView } from "./tailbeat-view.ts";

const FRAME_INTERVAL_MS = 1000 / 60;
const STATUS_INTERVAL_MS = 500;
const STRIP_INTERVAL_MS = 1000;
const FLAGS_INTERVAL_MS = 100;
/** How often a live link is asked whether it has gone silent. */
const SILENCE_CHECK_MS = 50;
const MARKS_SHOWN = 50;
/** This many bytes without one readable packet are a wrong speed or layout, not a late start. */
const UNREADABLE_BYTES = 4096;

export interface MonitorOptions {
  readonly rig: Rig;
  readonly source: ByteSource;
  /** null when the run is not recorded. */
  readonly recorder: TrialRecorder | null;
  readonly startedAt: Date;
  /** Midlines that a camera saw in the replayed trial. */
  readonly camera?: CameraTrack | undefined;
  readonly dashboardFolder: string;
  readonly host: string;
  readonly port: number;
  readonly token?: string | undefined;
}

export class Monitor implements ByteSink {
  readonly #options: MonitorOptions;
  readonly #server: StreamServer;
  readonly #frames: FrameWriter;
  /** Conditions since the last frame: one bad sweep among three shows too. */
  readonly #conditions: Uint8Array;
  readonly #link = new BehaviorSubject<{ state: LinkState; detail: string }>({
    state: "opening",
    detail: "",
  });
  readonly #flagChanges = new Subject<void>();
  readonly #marks = new BehaviorSubject<readonly Mark[]>([]);
  #run = 0;
  #pipeline: Pipeline;
  #strip = new Strip();
  #framedSweeps = 0;
  #subscription: Subscription | undefined;
  #stopFrames: (() => void) | undefined;
  #stopDiskWatch: (() => void) | undefined;

  constructor(options: MonitorOptions) {
    this.#options = options;
    this.#frames = new FrameWriter(options.rig.sensors.length);
    this.#conditions = new Uint8Array(options.rig.sensors.length);
    this.#pipeline = this.#newPipeline();
    this.#server = new StreamServer({
      ...options,
      greeting: () => this.#greeting(),
      newestFrame: () => this.#newestFrame(),
      onMessage: (message) => this.#act(message),
    });
  }

  /** Sweeps of this run that went through all stages. */
  get sweepCount(): number {
    return this.#pipeline.sweepCount;
  }

  /** Starts serving. @returns the dashboard's address. */
  async listen(): Promise<string> {
    const address = await this.#server.listen();
    this.#stopFrames = every(FRAME_INTERVAL_MS, () => this.#sendFrame());
    const { recorder, rig } = this.#options;
    if (recorder !== null) {
      this.#stopDiskWatch = watchDisk({ recorder, thresholds: rig.thresholds, run: () => this.#pipeline });
    }
    this.#subscription = this.#messages().subscribe((message) => this.#server.sendText(message));
    if (this.#options.source.kind !== "trial") {
      this.#subscription.add(interval(SILENCE_CHECK_MS).subscribe(() => this.#checkSilence()));
    }
    return address;
  }

  /** Runs the source to its end. */
  async run(): Promise<void> {
    await this.#options.source.run(this);
    this.#stopDiskWatch?.();
    this.#pipeline.finish();
    await this.#options.recorder?.close();
  }

  /** Ends the run and the serving; resolves when everything is closed and on the disk. */
  async close(): Promise<void> {
    await this.#options.source.stop();
    this.#stopFrames?.();
    this.#stopDiskWatch?.();
    this.#subscription?.unsubscribe();
    this.#pipeline.finish();
    await this.#options.recorder?.close();
    await this.#server.close();
  }

  /** A looped trial starts over: everything computed starts anew, and viewers clear their past. */
  startOver(): void {
    this.#pipeline.finish();
    this.#run++;
    this.#pipeline = this.#newPipeline();
    this.#strip = new Strip();
    this.#framedSweeps = 0;
    this.#marks.next([]);
    for (const message of this.#greeting()) this.#server.sendText(message);
  }

  bytes(chunk: Uint8Array, hostTimeMs: number): void {
    this.#options.recorder?.bytes(chunk, hostTimeMs);
    this.#pipeline.bytes(chunk, hostTimeMs);
  }

  linkState(state: LinkState, detail: string, hostTimeMs: number): void {
    this.#options.recorder?.linkState(state, detail, hostTimeMs);
    this.#pipeline.hostTime(hostTimeMs);
    this.#link.next({ state, detail });
  }

  choice(choice: Choice): void {
    this.#pipeline.choose(choice);
  }

  mark(text: string): void {
    this.#pipeline.mark(text, "trial");
  }

  #newPipeline(): Pipeline {
    const { rig, startedAt, recorder, camera } = this.#options;
    const observer: PipelineObserver = {
      sweep: (sweep) => this.#noteSweep(sweep),
      flag: (flag) => {
        recorder?.flag(flag);
        this.#flagChanges.next();
      },
      mark: (mark) => this.#marks.next([mark, ...this.#marks.value].slice(0, MARKS_SHOWN)),
    };
    return new Pipeline(rig, { startedAt, observer, camera });
  }

  #noteSweep(sweep: Sweep): void {
    const conditions = this.#conditions;
    for (let i = 0; i < conditions.length; i++) conditions[i]! |= sweep.conditions[i]!;
    const { midline, travel } = this.#pipeline;
    this.#strip.add(sweep.timeS, travel.lateral(midline.positions, POINT_COUNT - 1));
  }

  /** Trouble of this computer's disk, not of the trial's bytes: a replay does not have it. */
  #watchRecorder(): void {
    const { flags, timeS } = this.#pipeline;
    const state = this.#options.recorder?.state;
    if (state?.state === "failed") flags.raise("recording trouble", -1, "alarm", timeS, state.detail);
    else flags.clear("recording trouble", -1, timeS);
  }

  #checkSilence(): void {
    if (this.#link.value.state !== "ended") this.#pipeline.hostTime(Date.now());
  }

  #act(message: DashboardMessage): void {
    const { recorder } = this.#options;
    if (message.type === "choose") {
      const choice: Choice = { heading: message.heading };
      recorder?.choice(choice, Date.now());
      this.#pipeline.choose(choice);
    } else {
      const mark = this.#pipeline.mark(message.text, "operator");
      recorder?.mark(mark, Date.now());
    }
  }

  #sendFrame(): void {
    if (this.#pipeline.sweepCount === this.#framedSweeps) return;
    this.#framedSweeps = this.#pipeline.sweepCount;
    this.#server.sendFrame(this.#frames.write(this.#pipeline, this.#conditions));
    this.#conditions.fill(0);
  }

  #newestFrame(): Uint8Array | null {
    return this.#pipeline.sweepCount === 0 ? null : this.#frames.write(this.#pipeline, this.#conditions);
  }

  /** All text messages, each when it is due. */
  #messages(): Observable<BridgeMessage> {
    const soon = throttleTime<void>(FLAGS_INTERVAL_MS, undefined, { leading: true, trailing: true });
    return new Observable<BridgeMessage>((out) => {
      const all = merge(interval(STATUS_INTERVAL_MS), this.#link).subscribe(() => {
        this.#watchRecorder();
        out.next(this.#status());
        for (const message of this.#beside()) out.next(message);
      });
      all.add(this.#flagChanges.pipe(soon).subscribe(() => out.next(this.#flagsMessage())));
      all.add(this.#marks.subscribe(() => out.next(this.#marksMessage())));
      all.add(interval(STRIP_INTERVAL_MS).subscribe(() => out.next(this.#strip.message())));
      return all;
    });
  }

  #greeting(): BridgeMessage[] {
    const messages = [this.#welcome(), this.#status(), this.#flagsMessage(), this.#marksMessage()];
    return [...messages, this.#strip.message(), ...this.#beside()];
  }

  /** What there is to compare the body with. */
  #beside(): BridgeMessage[] {
    const messages = [driveMessage(this.#pipeline), cameraMessage(this.#pipeline)];
    return messages.filter((message) => message !== null);
  }

  #welcome(): WelcomeMessage {
    const { rig, source, startedAt } = this.#options;
    return {
      type: "welcome",
      softwareVersion,
      rigName: rig.name,
      bodyKind: rig.body.kind,
      lengthM: rig.body.lengthMm / 1000,
      widthM: rig.body.widthMm === undefined ? null : rig.body.widthMm / 1000,
      rateHz: rig.hub.rateHz,
      sensors: rig.sensors.map(({ name, station }, i) => ({
        name,
        station,
        hasMag: rig.models[i]?.mag !== undefined,
      })),
      pointCount: POINT_COUNT,
      source: { kind: source.kind, label: source.label },
      heading: rig.heading,
      flowMPerS: rig.water.flowMPerS ?? null,
      runId: `${startedAt.getTime()}-${process.pid}-${this.#run}`,
    };
  }

  #status(): StatusMessage {
    const { recorder, source } = this.#options;
    const { health, gait, headMotion, drift, counters, fusion, midline } = this.#pipeline;
    const { timeS, hostTimeMs, sweepCount, chosenHeading } = this.#pipeline;
    const { good, badChecksum, discardedBytes } = counters;
    return {
      type: "status",
      hubTimeS: timeS,
      ...this.#linkView(),
      recording: recorder?.state ?? { state: "off", detail: "", elapsedS: 0, bytes: 0 },
      sweepsPerS: health.sweepsPerS,
      lostShare: health.lostShare60,
      behindMs: source.kind === "trial" || sweepCount === 0 ? null : Math.max(0, Date.now() - hostTimeMs),
      driftPpm: drift.ppm,
      counters: { good, badChecksum, discardedBytes },
      tailbeat: tailbeatView(gait),
      noseMoves: headMotion?.held === null,
      heading: fusion.heading,
      chosenHeading,
      midline: { by: midline.inUse, whySmooth: midline.whySmooth },
    };
  }

  #linkView(): { link: LinkView; linkDetail: string } {
    const { state, detail } = this.#link.value;
    const { counters, complaint, silent } = this.#pipeline;
    if (state !== "open") return { link: state, linkDetail: detail };
    if (complaint !== null) return { link: "silent", linkDetail: complaint };
    if (counters.good === 0 && counters.bytes > UNREADABLE_BYTES) {
      const hint = "check the rig's packet layout and baud rate";
      return {
        link: "silent",
        linkDetail: `${counters.bytes} bytes came, but no packet can be read: ${hint}.`,
      };
    }
    if (counters.good === 0) return { link: "silent", linkDetail: "Open, and nothing has come yet." };
    return silent
      ? { link: "silent", linkDetail: "Open, but no sweep arrives." }
      : { link: "flowing", linkDetail: detail };
  }

  #flagsMessage(): FlagsMessage {
    const copy = (flags: readonly Flag[]) => flags.map((flag) => ({ ...flag }));
    const { open, ended } = this.#pipeline.flags;
    return { type: "flags", open: copy(open), ended: copy(ended) };
  }

  #marksMessage(): MarksMessage {
    return { type: "marks", marks: this.#marks.value };
  }
}
