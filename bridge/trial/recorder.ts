/**
 * Records a trial: every byte of the link before anything interprets it, the link's changes, marks and flags. Memory is
 * written to the files five times a second and put on the disk itself often enough that a crash or power cut costs at
 * most the last second. When writing fails the monitor goes on: data waits in a queue of limited size, writing is tried
 * again once a second, and what did not fit the queue is stated in the recording as a gap. Nothing is dropped silently.
 */
import { basename, join } from "node:path";
import type { ByteSink, LinkState } from "../link/source.ts";
import type { Rig } from "../rig/load.ts";
import type { CheckAction } from "../wire/check.ts";
import type { Flag, Mark } from "../wire/flag.ts";
import type { Choice, StatusMessage } from "../wire/messages.ts";
import { AppendFile, type OpenAppend, openAppend } from "./append-file.ts";
import { FLAGS_FILE, MARKS_FILE, type Manifest, type Origin, PACKETS_FILE, SEALS_FILE } from "./manifest.ts";
import { encodeRecord, type Gap, MAX_CHUNK_BYTES, type TrialRecord } from "./records.ts";
import { manifestSeal, SealChain } from "./seals.ts";
import { createTrialFolder, syncFolder, unwritable } from "./trial-folder.ts";

/** Memory goes to the file this often, or as soon as WRITE_BYTES wait. */
const WRITE_INTERVAL_MS = 200;
const WRITE_BYTES = 65_536;
/** From one sync to the next. With one write interval of slack, a power cut costs at most a second. */
const SYNC_INTERVAL_MS = 800;
const RETRY_INTERVAL_MS = 1000;
/** Some minutes of a busy link (921 600 baud carry 92 kB a second), small beside the monitor's other memory. */
const QUEUE_LIMIT_BYTES = 32 * 2 ** 20;
/** Marks and flags are rare and short: thousands of them. */
const LINES_LIMIT_BYTES = 2 ** 20;

export interface RecorderOptions {
  /** The trial's own folder, recordings/<name>; must not exist. */
  readonly folder: string;
  readonly rig: Rig;
  readonly origin: Origin;
  readonly softwareVersion: string;
  readonly startedAt: Date;
  readonly notes?: string;
  readonly settings?: Record<string, unknown>;
  readonly queueLimitBytes?: number;
  /** How files are opened; tests put a failing disk here. */
  readonly openFile?: OpenAppend;
}

interface Files {
  readonly packets: AppendFile;
  readonly seals: AppendFile;
  readonly marks: AppendFile;
  readonly flags: AppendFile;
}

export type RecordingState = StatusMessage["recording"];

export class TrialRecorder implements Pick<ByteSink, "bytes" | "linkState"> {
  readonly name: string;
  readonly folder: string;
  readonly #startedAtMs: number;
  readonly #queueLimit: number;
  readonly #files: Files;
  readonly #chain: SealChain;
  readonly #timer: NodeJS.Timeout;
  #writing: Promise<void> | null = null;
  #lastSyncMs: number;
  #lastFailureMs = 0;
  /** Why writing does not work at the moment. */
  #failure: string | null = null;
  #gap: Gap | null = null;
  /** Bytes of the link that earlier gaps cost. */
  #lostBytes = 0;
  /** Marks and flags that found their queue full. */
  #lostLines = 0;
  #lastRecordMs: number;
  #endedAtMs: number | null = null;

  /**
   * Makes the folder, writes trial.json and starts.
   * @throws BendwatchError TRIAL_EXISTS, TRIAL_UNWRITABLE
   */
  static async create(options: RecorderOptions): Promise<TrialRecorder> {
    const { folder } = options;
    const openFile = options.openFile ?? openAppend;
    const first = manifestSeal(createTrialFolder(folder, manifestOf(options)));
    try {
      const chain = new SealChain(first);
      const fileOf = async (name: string, onWritten?: (bytes: Uint8Array) => void) =>
        new AppendFile(await openFile(join(folder, name)), onWritten);
      const files = {
        packets: await fileOf(PACKETS_FILE, (bytes) => chain.update(bytes)),
        seals: await fileOf(SEALS_FILE),
        marks: await fileOf(MARKS_FILE),
        flags: await fileOf(FLAGS_FILE),
      };
      files.seals.offerLine(first);
      syncFolder(folder);
      return new TrialRecorder(options, files, chain);
    } catch (cause) {
      throw unwritable(folder, cause as Error);
    }
  }

  private constructor(options: RecorderOptions, files: Files, chain: SealChain) {
    this.name = basename(options.folder);
    this.folder = options.folder;
    this.#startedAtMs = options.startedAt.getTime();
    this.#lastRecordMs = this.#startedAtMs;
    this.#queueLimit = options.queueLimitBytes ?? QUEUE_LIMIT_BYTES;
    this.#files = files;
    this.#chain = chain;
    this.#lastSyncMs = Date.now();
    this.#timer = setInterval(() => this.#wake(), WRITE_INTERVAL_MS);
  }

  /** For the status message: `detail` is the trial's name, or why recording failed. */
  get state(): RecordingState {
    const nowMs = this.#endedAtMs ?? Date.now();
    return {
      state: this.#failure !== null ? "failed" : this.#endedAtMs !== null ? "off" : "on",
      detail: [this.#failure ?? this.name, ...this.#losses()].join("; "),
      elapsedS: Math.max(0, nowMs - this.#startedAtMs) / 1000,
      bytes: this.#files.packets.offset,
    };
  }

  bytes(chunk: Uint8Array, hostTimeMs: number): void {
    for (let at = 0; at < chunk.length; at += MAX_CHUNK_BYTES) {
      const part = chunk.subarray(at, at + MAX_CHUNK_BYTES);
      this.#record({ kind: "bytes", hostTimeMs, chunk: part }, part.length);
    }
  }

  linkState(state: LinkState, detail: string, hostTimeMs: number): void {
    this.#record({ kind: "link", hostTimeMs, state, detail }, 0);
  }

  /** Keeps what the operator chose, between the bytes where it took effect. */
  choice(choice: Choice, hostTimeMs: number): void {
    this.#record({ kind: "choice", hostTimeMs, choice }, 0);
  }

  /** Keeps what the operator did in a release check, between the bytes where it was done. */
  check(check: CheckAction, hostTimeMs: number): void {
    this.#record({ kind: "check", hostTimeMs, check }, 0);
  }

  /** Keeps a mark. @param hostTimeMs when it was made, for replaying */
  mark(mark: Mark, hostTimeMs: number): void {
    const { timeS, text, from } = mark;
    this.#line(this.#files.marks, { hostTimeMs, timeS, text, from });
  }

  /** Keeps a flag as it is now; call at onset, when it grew and when it ended. The last line of an id holds. */
  flag(flag: Flag): void {
    this.#line(this.#files.flags, flag);
  }

  /** Writes all that waits. For sources faster than the disk (import); live recording needs no call. */
  async drain(): Promise<void> {
    await this.#writing;
    await this.#start(false);
  }

  /** Ends the recording; resolves when all is on the disk or, on a failing disk, after one last try (see `state`). */
  async close(detail = "stopped"): Promise<void> {
    if (this.#endedAtMs !== null) return;
    clearInterval(this.#timer);
    this.#endedAtMs = Date.now();
    await this.drain();
    this.#closeGap();
    this.#files.packets.offer(encodeRecord({ kind: "end", hostTimeMs: this.#lastRecordMs, detail }));
    await this.#start(true);
    for (const file of Object.values(this.#files) as AppendFile[]) await file.close().catch(() => {});
  }

  #record(record: TrialRecord, linkBytes: number): void {
    if (this.#endedAtMs !== null) return;
    this.#lastRecordMs = record.hostTimeMs;
    const { packets } = this.#files;
    if (this.#gap !== null || packets.queuedBytes >= this.#queueLimit) {
      this.#widenGap(record.hostTimeMs, linkBytes);
      return;
    }
    packets.offer(encodeRecord(record));
    if (packets.queuedBytes >= WRITE_BYTES) this.#wake();
  }

  #line(file: AppendFile, value: unknown): void {
    if (this.#endedAtMs !== null) return;
    if (file.queuedBytes < LINES_LIMIT_BYTES) file.offerLine(value);
    else this.#lostLines++;
  }

  #losses(): string[] {
    const bytes = this.#lostBytes + (this.#gap?.bytes ?? 0);
    return [
      ...(bytes > 0 ? [`${bytes} bytes of the link not recorded`] : []),
      ...(this.#lostLines > 0 ? [`${this.#lostLines} marks or flags not recorded`] : []),
    ];
  }

  #widenGap(hostTimeMs: number, linkBytes: number): void {
    this.#failure ??= "the disk is too slow for the link";
    const gap = this.#gap ?? {
      records: 0,
      bytes: 0,
      fromMs: hostTimeMs,
      toMs: hostTimeMs,
      reason: this.#failure,
    };
    this.#gap = { ...gap, records: gap.records + 1, bytes: gap.bytes + linkBytes, toMs: hostTimeMs };
  }

  /** States the gap in the recording, at its place in the order; from here on data is taken again. */
  #closeGap(): void {
    if (this.#gap === null) return;
    this.#files.packets.offer(encodeRecord({ kind: "gap", hostTimeMs: this.#gap.toMs, gap: this.#gap }));
    this.#lostBytes += this.#gap.bytes;
    this.#gap = null;
  }

  /** Starts writing unless it is under way, or failed a moment ago. */
  #wake(): void {
    if (this.#writing !== null) return;
    if (this.#failure !== null && Date.now() - this.#lastFailureMs < RETRY_INTERVAL_MS) return;
    void this.#start(false);
  }

  /** Writes; only when no writing is under way. Never rejects. */
  #start(syncNow: boolean): Promise<void> {
    this.#writing = this.#write(syncNow).finally(() => {
      this.#writing = null;
    });
    return this.#writing;
  }

  async #write(syncNow: boolean): Promise<void> {
    const { packets, seals, marks, flags } = this.#files;
    try {
      await packets.flush();
      await marks.flush();
      await flags.flush();
      if (syncNow || Date.now() - this.#lastSyncMs >= SYNC_INTERVAL_MS) {
        this.#lastSyncMs = Date.now();
        await packets.sync();
        if (this.#chain.unsealedBytes > 0) seals.offerLine(this.#chain.seal());
      }
      await seals.flush();
      this.#failure = null;
      this.#closeGap();
    } catch (error) {
      this.#failure = (error as Error).message;
      this.#lastFailureMs = Date.now();
    }
  }
}

function manifestOf(options: RecorderOptions): Manifest {
  return {
    formatVersion: 1,
    softwareVersion: options.softwareVersion,
    name: basename(options.folder),
    startedAt: options.startedAt.toISOString(),
    origin: options.origin,
    notes: options.notes ?? "",
    settings: options.settings ?? {},
    rig: options.rig,
  };
}
