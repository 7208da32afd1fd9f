/** Replays a recorded trial: the same bytes, cut the same way, at the recorded pace, a multiple of it, or unpaced. */
import { basename, join } from "node:path";
import { z } from "zod";
import type { ByteSink, ByteSource } from "../link/source.ts";
import { readJsonLines } from "./json-lines.ts";
import { MARKS_FILE } from "./manifest.ts";
import { TrialReader } from "./reader.ts";
import type { TrialRecord } from "./records.ts";

/** How long unpaced replay may keep the process from other work. */
const SLICE_MS = 10;

export const markLineSchema = z.object({
  hostTimeMs: z.number().describe("When it was made, host clock."),
  timeS: z.number().describe("Hub time."),
  text: z.string(),
  from: z.enum(["operator", "hub button", "trial"]),
});
export type MarkLine = z.infer<typeof markLineSchema>;

export interface ReplayOptions {
  /** 1 = as recorded, 2 = twice as fast; "max" = as fast as the sink takes it. */
  readonly rate: number | "max";
  readonly loop: boolean;
  /** Called before the trial starts over, with the number of the loop that starts, from 1. Hub time starts over too. */
  readonly onLoop?: (loop: number) => void;
}

export class TrialSource implements ByteSource {
  readonly kind = "trial";
  readonly label: string;
  readonly #folder: string;
  readonly #options: ReplayOptions;
  readonly #marks: readonly MarkLine[];
  #stopped = false;
  #finished: Promise<void> = Promise.resolve();
  /** Ends the wait that is under way. */
  #wakeUp: () => void = () => {};
  #nextMark = 0;
  /** Added to recorded host times: the length of the loops before. */
  #shiftMs = 0;

  constructor(folder: string, options: ReplayOptions) {
    this.label = `trial ${basename(folder)}`;
    this.#folder = folder;
    this.#options = options;
    // Those of the hub's button come out of the bytes themselves.
    this.#marks = readJsonLines(join(folder, MARKS_FILE), markLineSchema)
      .values.filter(({ from }) => from !== "hub button")
      .sort((a, b) => a.hostTimeMs - b.hostTimeMs);
  }

  /** @throws (rejects) BendwatchError TRIAL_UNREADABLE when there are no packets to open */
  run(sink: ByteSink): Promise<void> {
    const running = this.#run(sink);
    this.#finished = running.catch(() => {});
    return running;
  }

  async stop(): Promise<void> {
    this.#stopped = true;
    this.#wakeUp();
    await this.#finished;
  }

  async #run(sink: ByteSink): Promise<void> {
    for (let loop = 0; !this.#stopped; loop++) {
      if (loop > 0) this.#options.onLoop?.(loop);
      const reader = new TrialReader(this.#folder);
      try {
        const times = await this.#play(reader, sink);
        const again = this.#options.loop && times !== null;
        if (!again && !this.#stopped)
          sink.linkState("ended", endDetail(reader), (times?.lastMs ?? 0) + this.#shiftMs);
        if (!again) return;
        await this.#wait(0);
        this.#shiftMs += times.lastMs - times.firstMs + 1;
      } finally {
        reader.close();
      }
    }
  }

  /** Delivers the trial once. @returns its host times, null when it holds no record */
  async #play(reader: TrialReader, sink: ByteSink): Promise<{ firstMs: number; lastMs: number } | null> {
    const pace = new Pace(this.#options.rate);
    let times: { firstMs: number; lastMs: number } | null = null;
    this.#nextMark = 0;
    for (let record = reader.next(); record !== null && !this.#stopped; record = reader.next()) {
      const { hostTimeMs } = record;
      if (times === null) {
        times = { firstMs: hostTimeMs, lastMs: hostTimeMs };
        sink.linkState("open", this.label, hostTimeMs + this.#shiftMs);
      }
      times.lastMs = Math.max(times.lastMs, hostTimeMs);
      const waitMs = pace.waitBefore(hostTimeMs);
      if (waitMs !== null) await this.#wait(waitMs);
      if (this.#stopped) break;
      this.#deliverMarks(hostTimeMs, sink);
      deliver(record, hostTimeMs + this.#shiftMs, sink);
    }
    if (!this.#stopped) this.#deliverMarks(Number.POSITIVE_INFINITY, sink);
    return times;
  }

  #deliverMarks(untilMs: number, sink: ByteSink): void {
    for (; this.#nextMark < this.#marks.length; this.#nextMark++) {
      const mark = this.#marks[this.#nextMark]!;
      if (mark.hostTimeMs > untilMs) return;
      sink.mark(mark.text, mark.hostTimeMs + this.#shiftMs);
    }
  }

  /** Lets other work run for `ms`; 0 for one turn of the event loop. `stop` ends it. */
  #wait(ms: number): Promise<void> {
    if (ms === 0) return new Promise((resolve) => setImmediate(resolve));
    return new Promise((resolve) => {
      const timer = setTimeout(resolve, ms);
      this.#wakeUp = () => {
        clearTimeout(timer);
        resolve();
      };
    });
  }
}

/** Decides before each record how long to wait. A host clock set back while recording is taken as no time passed. */
class Pace {
  readonly #rate: number | "max";
  readonly #startMs = performance.now();
  #sliceStartMs = performance.now();
  #dueMs = 0;
  #previousMs: number | null = null;

  constructor(rate: number | "max") {
    this.#rate = rate;
  }

  /** @returns ms to wait, 0 for one turn of the event loop, null to go on at once */
  waitBefore(hostTimeMs: number): number | null {
    const nowMs = performance.now();
    if (this.#rate !== "max") {
      this.#dueMs += Math.max(0, hostTimeMs - (this.#previousMs ?? hostTimeMs)) / this.#rate;
      this.#previousMs = hostTimeMs;
      const waitMs = this.#startMs + this.#dueMs - nowMs;
      if (waitMs >= 1) {
        this.#sliceStartMs = nowMs + waitMs;
        return waitMs;
      }
    }
    if (nowMs - this.#sliceStartMs < SLICE_MS) return null;
    this.#sliceStartMs = nowMs;
    return 0;
  }
}

function deliver(record: TrialRecord, hostTimeMs: number, sink: ByteSink): void {
  if (record.kind === "bytes") sink.bytes(record.chunk, hostTimeMs);
  else if (record.kind === "choice") sink.choice?.(record.choice, hostTimeMs);
  else if (record.kind === "gap") sink.linkState("open", gapDetail(record.gap), hostTimeMs);
  // The recorded link's end is not this source's end: a loop may follow.
  else if (record.kind === "link" && record.state !== "ended") {
    sink.linkState(record.state, record.detail, hostTimeMs);
  }
}

function gapDetail(gap: { bytes: number; fromMs: number; toMs: number; reason: string }): string {
  const seconds = ((gap.toMs - gap.fromMs) / 1000).toFixed(1);
  return `${gap.bytes} bytes over ${seconds} s were not recorded: ${gap.reason}`;
}

function endDetail(reader: TrialReader): string {
  const { end } = reader;
  if (end === null || end.kind === "complete") return "end of the trial";
  if (end.kind === "truncated") return `end of the trial; its last ${end.unreadBytes} bytes are cut off`;
  return `the trial is damaged from byte ${end.offset} on; run bendwatch verify`;
}
