/**
 * Leads through the release check: begins and ends the steps, and tells the recorder of it, so that the recording alone
 * gives the verdict. A step that passed is followed by the next; one that failed, or took too long, too, unless an operator
 * is asked who may repeat it.
 */
import type { ByteSink, ByteSource, LinkState } from "../link/source.ts";
import { CHECK_SCRIPT } from "../rehearsal/check-script.ts";
import type { TrialRecorder } from "../trial/recorder.ts";
import { CHECK_STEPS, type CheckAction, type CheckStepName, type CheckStepView } from "../wire/check.ts";
import type { CheckRun } from "./check-run.ts";

/** When a step has taken too long, ms since the epoch. */
export type Deadline = (step: CheckStepName, begunMs: number) => number;

/** An operator has to read, walk and handle the body. s */
const OPERATOR_TIMES: Readonly<Record<CheckStepName, number>> = {
  link: 60,
  rest: 120,
  "turn-through": 300,
  bend: 180,
  range: 120,
  supply: 30,
  clock: 120,
};

export const operatorDeadline: Deadline = (step, begunMs) => begunMs + OPERATOR_TIMES[step] * 1000;

/** A rehearsed body does each thing in its time, and waits for nobody. */
export function rehearsedDeadline(startMs: number): Deadline {
  const { turnS, straightS, hardS, endS } = CHECK_SCRIPT;
  const untilS: Readonly<Record<CheckStepName, number>> = {
    link: 13,
    rest: turnS,
    "turn-through": straightS,
    bend: hardS,
    range: endS,
    supply: endS + 10,
    clock: endS + 40,
  };
  return (step) => startMs + untilS[step] * 1000;
}

/** Where the guide speaks. */
export interface GuideScreen {
  begun(view: CheckStepView): void;
  progress(view: CheckStepView): void;
  ended(view: CheckStepView): void;
  /** All steps were begun; asked only while someone can answer. */
  done(): void;
  /** The link's own words. */
  link(detail: string): void;
}

export interface GuideOptions {
  readonly run: CheckRun;
  readonly source: ByteSource;
  readonly recorder: Pick<TrialRecorder, "bytes" | "linkState" | "check">;
  readonly deadline: Deadline;
  readonly screen: GuideScreen;
  /** Whether someone is there who may repeat a step. */
  readonly asks: boolean;
}

/** The steps are looked at this often, ms. */
const LOOK_MS = 200;

export class CheckGuide implements ByteSink {
  readonly #options: GuideOptions;
  #begunMs = 0;
  #lookedMs = 0;
  #hostTimeMs: number;
  /** A step that ended badly waits for the operator; so does the end. */
  #waiting = false;
  #stopped = false;

  constructor(options: GuideOptions, startedAtMs: number) {
    this.#options = options;
    this.#hostTimeMs = startedAtMs;
  }

  /** What the operator says before the first step. */
  prepare(operator: string, without: readonly string[]): void {
    if (operator !== "") this.#act({ action: "operator", name: operator });
    for (const sensor of without) this.#act({ action: "take out", sensor });
  }

  /** Leads to the end: of the steps, of the source, or until `stop`. */
  async lead(): Promise<void> {
    const { source } = this.#options;
    this.#begin(CHECK_STEPS[0]);
    // A silent link gives no bytes to look at the time by; a rehearsal goes by its own.
    const timer = source.kind === "serial" ? setInterval(() => this.#passes(Date.now()), LOOK_MS) : undefined;
    try {
      await source.run(this);
    } finally {
      clearInterval(timer);
      const { underWay } = this.#options.run.check;
      if (underWay !== null) this.#end(underWay);
    }
  }

  /** Begins a step, or repeats it. */
  repeat(step: CheckStepName): void {
    if (!this.#stopped) this.#begin(step);
  }

  /** Goes on to the next step, whatever became of this one; after the last one, ends. */
  goOn(): void {
    const { underWay } = this.#options.run.check;
    if (underWay !== null) this.#end(underWay);
    this.#next();
  }

  stop(): void {
    this.#stopped = true;
    void this.#options.source.stop();
  }

  bytes(chunk: Uint8Array, hostTimeMs: number): void {
    if (this.#stopped) return;
    this.#options.recorder.bytes(chunk, hostTimeMs);
    this.#options.run.pipeline.bytes(chunk, hostTimeMs);
    this.#passes(hostTimeMs);
  }

  linkState(state: LinkState, detail: string, hostTimeMs: number): void {
    this.#hostTimeMs = hostTimeMs;
    this.#options.recorder.linkState(state, detail, hostTimeMs);
    this.#options.run.pipeline.hostTime(hostTimeMs);
    if (state !== "ended") this.#options.screen.link(detail);
  }

  mark(): void {}

  #passes(hostTimeMs: number): void {
    this.#hostTimeMs = hostTimeMs;
    if (hostTimeMs - this.#lookedMs < LOOK_MS) return;
    this.#lookedMs = hostTimeMs;
    const { run, deadline, screen, asks } = this.#options;
    run.pipeline.hostTime(hostTimeMs);
    const { underWay } = run.check;
    if (underWay === null || this.#waiting) return;
    const view = run.check.step(underWay);
    screen.progress(view);
    const enough = view.state === "not needed" || (view.share >= 1 && view.missing.length === 0);
    const tooLong = hostTimeMs > deadline(underWay, this.#begunMs);
    if (!enough && !tooLong) return;
    this.#end(underWay);
    const good = view.state === "passed" || view.state === "not needed";
    if (good || !asks) this.#next();
    else this.#waiting = true;
  }

  #begin(step: CheckStepName): void {
    this.#waiting = false;
    this.#begunMs = this.#hostTimeMs;
    this.#act({ action: "begin", step });
    this.#options.screen.begun(this.#options.run.check.step(step));
  }

  #end(step: CheckStepName): void {
    this.#act({ action: "end", step });
    this.#options.screen.ended(this.#options.run.check.step(step));
  }

  #next(): void {
    const { run, screen, asks } = this.#options;
    const next = CHECK_STEPS.find((step) => run.check.step(step).attempts === 0);
    if (next !== undefined) this.#begin(next);
    else if (asks && !this.#waiting && run.check.verdict().verdict !== "go") {
      this.#waiting = true;
      screen.done();
    } else this.stop();
  }

  #act(action: CheckAction): void {
    this.#options.recorder.check(action, this.#hostTimeMs);
    this.#options.run.act(action, this.#hostTimeMs);
  }
}
