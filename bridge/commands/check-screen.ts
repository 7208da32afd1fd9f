/** The release check on a terminal: a line a step, rewritten while it goes on, and keys to repeat it. */

import type { CheckReport } from "../check/report.ts";
import type { Rig } from "../rig/load.ts";
import { CHECK_STEPS, type CheckStepView, type CheckVerdict } from "../wire/check.ts";
import type { CheckGuide, GuideScreen } from "./check-guide.ts";

const VERDICTS: Readonly<Record<CheckVerdict, string>> = {
  go: "GO: every step passed.",
  "no-go": "NO-GO",
  incomplete: "INCOMPLETE: no verdict yet.",
};

export class TerminalScreen implements GuideScreen {
  readonly #rig: Rig;
  /** Whether someone is asked what to do after a step that did not pass. */
  readonly #asks: boolean;
  readonly #rewrites = process.stdout.isTTY === true;

  constructor(rig: Rig, asks: boolean) {
    this.#rig = rig;
    this.#asks = asks;
  }

  begun({ step, toDo, attempts }: CheckStepView): void {
    const number = `${CHECK_STEPS.indexOf(step) + 1} of ${CHECK_STEPS.length}`;
    console.log(`\n${number}  ${step}${attempts > 1 ? `, time ${attempts}` : ""}\n  ${toDo}`);
  }

  progress({ share, missing }: CheckStepView): void {
    if (!this.#rewrites) return;
    const width = process.stdout.columns ?? 80;
    const what = missing[0] === undefined ? "" : this.#said(missing[0].sensor, missing[0].text);
    const line = `  ${`${Math.round(share * 100)}`.padStart(3)} %  ${what}`;
    process.stdout.write(`\r\x1b[K${line.slice(0, width - 1)}`);
  }

  ended({ state, faults, missing, notes }: CheckStepView): void {
    if (this.#rewrites) process.stdout.write("\r\x1b[K");
    console.log(`  ${state}`);
    const why = state === "failed" ? faults : state === "not done" ? missing : [];
    for (const { sensor, text } of why) console.log(`  - ${this.#said(sensor, text)}`);
    if (state === "not needed") for (const note of notes) console.log(`  ${note}`);
    if (this.#asks && why.length > 0) console.log("  r repeats this step, Enter goes on, q ends the check");
  }

  done(): void {
    const steps = CHECK_STEPS.map((step, i) => `${i + 1} ${step}`).join(", ");
    console.log(`\nAll steps were done. To repeat one: ${steps}. Enter or q ends the check.`);
  }

  link(detail: string): void {
    console.log(`  ${detail}`);
  }

  #said(sensor: number, text: string): string {
    return sensor < 0 ? text : `${this.#rig.sensors[sensor]!.name}: ${text}`;
  }
}

/** Lets the keys of a terminal steer the guide. @returns how to let go of them */
export function listenToKeys(
  guide: CheckGuide,
  underWay: () => (typeof CHECK_STEPS)[number] | null,
): () => void {
  const { stdin } = process;
  let last: (typeof CHECK_STEPS)[number] = CHECK_STEPS[0];
  const onKey = (data: Buffer) => {
    for (const key of data.toString()) {
      last = underWay() ?? last;
      const step = CHECK_STEPS[Number(key) - 1];
      if (key === "q" || key === "\x03") guide.stop();
      else if (key === "r") guide.repeat(last);
      else if (key === "\r" || key === "\n") guide.goOn();
      else if (step !== undefined) guide.repeat(step);
    }
  };
  stdin.setRawMode(true);
  stdin.resume();
  stdin.on("data", onKey);
  return () => {
    stdin.off("data", onKey);
    stdin.setRawMode(false);
    stdin.pause();
  };
}

/** The verdict with its reasons and cautions, for the terminal. */
export function describeReport({ verdict, reasons, cautions, sensors }: CheckReport): string {
  const out = sensors.filter(({ takenOut }) => takenOut).map(({ name }) => name);
  return [
    VERDICTS[verdict],
    ...reasons.map(({ steps, sensor, text }) => {
      const of = [steps.join(", "), sensor ?? ""].filter(Boolean).join(", ");
      return `  ${of}${of === "" ? "" : ": "}${text}`;
    }),
    ...(out.length > 0 ? [`Taken out on purpose: ${out.join(", ")}.`] : []),
    ...cautions,
  ].join("\n");
}
