/**
 * The release check: seven steps, each judged from the sweeps that came while it was under way. Link, supply and clock
 * watch from the check's first step to its end, whatever step is under way; the others see only their own time. Beginning a
 * step again starts its figures anew.
 *
 * A flag of caution or alarm fails the step it belongs to: what concerns the link, the supply or the clock is theirs, the
 * rest is the step's that was under way.
 *
 * All of it follows from the bytes and from what the operator did between them (the trial's "check" records), so that the
 * same recording gives the same verdict.
 */
import type { HubStatus } from "../link/packets.ts";
import type { Sweep } from "../sweep.ts";
import {
  CHECK_STEPS,
  type CheckAction,
  type CheckFigure,
  type CheckReason,
  type CheckStepName,
  type CheckStepView,
  type CheckVerdict,
  type StepState,
} from "../wire/check.ts";
import type { Flag, FlagKind } from "../wire/flag.ts";
import { BendStep } from "./bend.ts";
import { ClockStep } from "./clock.ts";
import { LinkStep } from "./link.ts";
import { RangeStep } from "./range.ts";
import { RestStep } from "./rest.ts";
import type { CheckSetup, Finding, JudgedFigure, Step } from "./step.ts";
import { SupplyStep } from "./supply.ts";
import { TurnThroughStep } from "./turn-through.ts";

const WATCHING: readonly CheckStepName[] = ["link", "supply", "clock"];

/** The steps that flags belong to; all others belong to the step under way. */
const STEP_OF_FLAG: Partial<Record<FlagKind, CheckStepName>> = {
  "lost samples": "link",
  "corrupt packets": "link",
  "link silent": "link",
  "sensor read errors": "link",
  "duplicate sweeps": "clock",
  "late sweeps": "clock",
  "clock drift": "clock",
  "noise at rest": "rest",
  "gyro bias": "rest",
  "gravity at rest": "rest",
  "field at rest": "rest",
  "supply low": "supply",
  "hub temperature": "supply",
  "hub fault": "supply",
  "hub restarted": "clock",
};

/** Trouble of the computer's disk is no sensor's: the recording's own state tells of it. */
const NO_STEP: readonly FlagKind[] = ["recording trouble", "disk nearly full"];

/** One time that a step was begun. */
interface Run {
  readonly step: Step;
  readonly begunS: number;
  endedS: number | null;
  /** Raised since. Flags are the book's own, as they are now. */
  readonly raised: Flag[];
  /** Open when it began. */
  readonly carried: readonly Flag[];
}

export interface VerdictReason extends CheckReason {
  /** Those that it concerns; none: the check as a whole. */
  readonly steps: readonly CheckStepName[];
}

export class ReleaseCheck {
  readonly #setup: CheckSetup;
  readonly #isOut: boolean[];
  readonly #runs = new Map<CheckStepName, Run>();
  readonly #attempts = new Map<CheckStepName, number>();
  readonly #flags: Flag[] = [];
  #underWay: CheckStepName | null = null;
  #operator = "";
  #begunMs: number | null = null;
  #endedMs: number | null = null;

  constructor(setup: CheckSetup) {
    this.#setup = setup;
    this.#isOut = setup.sensors.map(() => false);
  }

  /** The operator did something. @param timeS hub time of the newest sweep */
  act(action: CheckAction, timeS: number, hostTimeMs: number): void {
    if ("name" in action) this.#operator = action.name;
    else if ("sensor" in action) this.#takeOut(action.sensor, action.action === "take out", timeS);
    else if (action.action === "begin") {
      this.#begunMs ??= hostTimeMs;
      this.#endedMs = null;
      this.#begin(action.step, timeS);
    } else {
      this.#endedMs = hostTimeMs;
      this.#end(action.step, timeS);
    }
  }

  sweep(sweep: Sweep): void {
    for (const [name, run] of this.#runs) if (this.#sees(name)) run.step.observe(sweep);
  }

  status(status: HubStatus, timeS: number): void {
    for (const [name, run] of this.#runs) if (this.#sees(name)) run.step.status?.(status, timeS);
  }

  /** A flag was raised. @param flag the book's own, which goes on changing */
  flag(flag: Flag): void {
    this.#flags.push(flag);
    const owner = STEP_OF_FLAG[flag.kind] ?? this.#underWay;
    // While a watching step is under way, what is not its own waits for the next step, if it lasts.
    const isOwn = owner !== null && (STEP_OF_FLAG[flag.kind] === owner || !WATCHING.includes(owner));
    if (isOwn && !NO_STEP.includes(flag.kind)) this.#runs.get(owner)?.raised.push(flag);
  }

  get underWay(): CheckStepName | null {
    return this.#underWay;
  }

  get operator(): string {
    return this.#operator;
  }

  /** Sensors left out on purpose, by index. */
  get isOut(): readonly boolean[] {
    return this.#isOut;
  }

  /** Host times of the first step's beginning and the last one's end, ms; null before. */
  get hostTimesMs(): { readonly begun: number | null; readonly ended: number | null } {
    return { begun: this.#begunMs, ended: this.#endedMs };
  }

  /** All flags raised, from the first byte on. */
  get flags(): readonly Flag[] {
    return this.#flags;
  }

  steps(): CheckStepView[] {
    return CHECK_STEPS.map((name) => this.step(name));
  }

  step(name: CheckStepName): CheckStepView {
    const run = this.#runs.get(name);
    const attempts = this.#attempts.get(name) ?? 0;
    if (run === undefined || attempts === 0)
      return { ...notBegun(name), toDo: STEPS[name](this.#setup, this.#isOut).toDo };
    const { step, begunS, endedS } = run;
    const finding = step.notNeeded === undefined ? step.finding(this.#isOut) : NOTHING;
    const faults = step.notNeeded === undefined ? this.#faults(name, run, finding) : [];
    return {
      step: name,
      state: stateOf(step, finding, faults, endedS !== null),
      toDo: step.toDo,
      share: finding.share,
      missing: finding.missing,
      attempts,
      begunS,
      endedS,
      figures: finding.figures.map(plain),
      faults,
      notes: step.notNeeded === undefined ? finding.notes : [step.notNeeded],
    };
  }

  verdict(): { readonly verdict: CheckVerdict; readonly reasons: readonly VerdictReason[] } {
    const views = this.steps();
    const faults = joined(views.map(({ step, faults }) => ({ step, reasons: faults })));
    const missing = joined(
      views.map(({ step, state, missing }) => {
        if (state === "not begun") return { step, reasons: [{ sensor: -1, text: "not begun" }] };
        return { step, reasons: state === "under way" || state === "not done" ? missing : [] };
      }),
    );
    if (this.#isOut.every(Boolean)) {
      missing.push({
        steps: [],
        sensor: -1,
        text: "every sensor is taken out: there is nothing to release",
      });
    }
    const verdict = faults.length > 0 ? "no-go" : missing.length > 0 ? "incomplete" : "go";
    return { verdict, reasons: [...faults, ...missing] };
  }

  /** What the pictures of the report are drawn from, beside the figures. */
  traces(): { readonly seen: readonly (readonly boolean[])[]; readonly supply: SupplyStep["trace"] } {
    const turned = this.#runs.get("turn-through")?.step;
    const supply = this.#runs.get("supply")?.step;
    return {
      seen: turned instanceof TurnThroughStep ? turned.seen : [],
      supply: supply instanceof SupplyStep ? supply.trace : [],
    };
  }

  #begin(name: CheckStepName, timeS: number): void {
    if (this.#underWay !== null) this.#end(this.#underWay, timeS);
    for (const watching of WATCHING) if (!this.#runs.has(watching)) this.#start(watching, timeS);
    const attempts = this.#attempts.get(name) ?? 0;
    // A watching step that is begun for the first time has been watching already.
    if (attempts > 0 || !WATCHING.includes(name)) this.#start(name, timeS);
    this.#attempts.set(name, attempts + 1);
    this.#underWay = name;
  }

  #start(name: CheckStepName, timeS: number): void {
    const isCarried = ({ kind, endS }: Flag) => {
      const owner = STEP_OF_FLAG[kind];
      return endS === null && (owner === undefined ? !WATCHING.includes(name) : owner === name);
    };
    this.#runs.set(name, {
      step: STEPS[name](this.#setup, [...this.#isOut]),
      begunS: timeS,
      endedS: null,
      raised: [],
      carried: this.#flags.filter((flag) => isCarried(flag) && !NO_STEP.includes(flag.kind)),
    });
  }

  #end(name: CheckStepName, timeS: number): void {
    const run = this.#runs.get(name);
    if (run !== undefined) run.endedS ??= timeS;
    if (this.#underWay === name) this.#underWay = null;
  }

  #takeOut(sensor: string, isOut: boolean, timeS: number): void {
    const i = this.#setup.sensors.findIndex(({ name }) => name === sensor);
    if (i < 0 || this.#isOut[i] === isOut) return;
    this.#isOut[i] = isOut;
    // The chain that bends is another one now.
    if (this.#underWay === "bend") this.#start("bend", timeS);
  }

  #sees(name: CheckStepName): boolean {
    return name === this.#underWay || WATCHING.includes(name);
  }

  #faults(name: CheckStepName, run: Run, { figures, faults }: Finding): CheckReason[] {
    const own = [
      ...figures.filter(({ ok }) => !ok).map((bad) => ({ sensor: bad.sensor, text: describe(bad) })),
      ...faults,
    ];
    // Open from before, and past its end: it was so all along. A watching step ends with the check.
    const { endedS } = run;
    const lasted = run.carried.filter(
      ({ endS }) => endS === null || (endedS !== null && !WATCHING.includes(name) && endS > endedS),
    );
    const told = [...run.raised, ...lasted].filter(
      ({ kind, sensor, severity }) =>
        severity !== "notice" &&
        run.step.ignores?.(kind) !== true &&
        !own.some((fault) => fault.sensor === sensor),
    );
    return [
      ...own,
      ...told.map(({ kind, sensor, detail, advice }) => ({ sensor, text: `${kind}: ${detail}. ${advice}` })),
    ].filter(({ sensor }) => this.#isOut[sensor] !== true);
  }
}

const STEPS: Readonly<Record<CheckStepName, (setup: CheckSetup, isOut: readonly boolean[]) => Step>> = {
  link: (setup) => new LinkStep(setup),
  rest: (setup) => new RestStep(setup),
  "turn-through": (setup) => new TurnThroughStep(setup),
  bend: (setup, isOut) => new BendStep(setup, isOut),
  range: (setup) => new RangeStep(setup),
  supply: (setup) => new SupplyStep(setup),
  clock: (setup) => new ClockStep(setup),
};

const NOTHING: Finding = { share: 1, missing: [], figures: [], faults: [], notes: [] };

function notBegun(step: CheckStepName): Omit<CheckStepView, "toDo"> {
  return {
    step,
    state: "not begun",
    share: 0,
    missing: [],
    attempts: 0,
    begunS: null,
    endedS: null,
    figures: [],
    faults: [],
    notes: [],
  };
}

/** The same said of several steps is said once. */
function joined(
  said: readonly { readonly step: CheckStepName; readonly reasons: readonly CheckReason[] }[],
): VerdictReason[] {
  const all: (VerdictReason & { steps: CheckStepName[] })[] = [];
  for (const { step, reasons } of said) {
    for (const { sensor, text } of reasons) {
      const same = all.find((reason) => reason.sensor === sensor && reason.text === text);
      if (same === undefined) all.push({ steps: [step], sensor, text });
      else if (!same.steps.includes(step)) same.steps.push(step);
    }
  }
  return all;
}

function stateOf(
  step: Step,
  { share, missing }: Finding,
  faults: readonly CheckReason[],
  ended: boolean,
): StepState {
  if (step.notNeeded !== undefined) return "not needed";
  if (faults.length > 0) return "failed";
  if (share >= 1 && missing.length === 0) return "passed";
  return ended ? "not done" : "under way";
}

function plain({ advice: _, ...figure }: JudgedFigure): CheckFigure {
  return figure;
}

/** "rate at rest 2.500 °/s, allowed at most 2.165 °/s: calibrate it again at rest". */
function describe({ name, unit, value, digits, least, most, advice }: JudgedFigure): string {
  const spaced = unit === "" ? "" : ` ${unit}`;
  const limits = [
    least === null ? "" : `at least ${least.toFixed(digits)}`,
    most === null ? "" : `at most ${most.toFixed(digits)}`,
  ].filter(Boolean);
  return `${name} ${value?.toFixed(digits)}${spaced}, allowed ${limits.join(" and ")}${spaced}: ${advice}`;
}
