/** The release check as it travels: what the operator does, and what the bridge shows of it. */

/** In the order they are done. */
export const CHECK_STEPS = ["link", "rest", "turn-through", "bend", "range", "supply", "clock"] as const;
export type CheckStepName = (typeof CHECK_STEPS)[number];

/** Longest name an operator may give, characters. */
export const MAX_OPERATOR_LENGTH = 80;

/** What the operator does in a check. Beginning a step again repeats it: its figures start anew. */
export type CheckAction =
  | { readonly action: "begin" | "end"; readonly step: CheckStepName }
  /** A sensor, by name, that is left out of the check on purpose, or put back into it. */
  | { readonly action: "take out" | "put back"; readonly sensor: string }
  | { readonly action: "operator"; readonly name: string };

/** not needed: nothing on this rig to check. not done: ended before enough was seen. */
export type StepState = "not begun" | "under way" | "passed" | "failed" | "not done" | "not needed";

/** go: every step passed. no-go: one failed. incomplete: none failed, and one is not done. */
export type CheckVerdict = "go" | "no-go" | "incomplete";

export interface CheckFigure {
  readonly name: string;
  /** Index of the sensor, or -1 for the whole rig. */
  readonly sensor: number;
  readonly unit: string;
  /** Rounded to `digits` decimals; null while not known. */
  readonly value: number | null;
  readonly digits: number;
  /** Limits, either of which may be missing. */
  readonly least: number | null;
  readonly most: number | null;
  readonly ok: boolean;
}

/** Why something is no-go, or what is missing. */
export interface CheckReason {
  /** Index of the sensor, or -1 for the whole rig. */
  readonly sensor: number;
  readonly text: string;
}

export interface CheckStepView {
  readonly step: CheckStepName;
  readonly state: StepState;
  /** One sentence. */
  readonly toDo: string;
  /** 0 to 1. */
  readonly share: number;
  /** What is still to do or missing; empty once enough was seen. */
  readonly missing: readonly CheckReason[];
  /** How often it was begun. */
  readonly attempts: number;
  /** Hub time, s; null before. */
  readonly begunS: number | null;
  readonly endedS: number | null;
  readonly figures: readonly CheckFigure[];
  /** Why it failed. */
  readonly faults: readonly CheckReason[];
  /** Said besides. */
  readonly notes: readonly string[];
}
