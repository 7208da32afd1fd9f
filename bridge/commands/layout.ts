/** bendwatch layout: where to put the sensors, before there is a trial. */
import { writeFileSync } from "node:fs";
import { type Command, Option } from "commander";
import { Midline } from "../body/midline.ts";
import { BendwatchError } from "../errors.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import { describePlan, type PlanSubject } from "../placement/describe.ts";
import type { Rebuilding } from "../placement/expected-error.ts";
import { drawPlan } from "../placement/picture.ts";
import { leastCount, type Placement, type PlacementPlan, planPlacement } from "../placement/plan.ts";
import { loadRig } from "../rig/load.ts";
import type { RigFile } from "../rig/rig.ts";
import { POINT_COUNT } from "../stages.ts";
import { countOf, gaitOf, type LayoutOptions, rangeOf, subjectOf } from "./layout-options.ts";
import { numbers, positiveNumber, wholeNumber } from "./options.ts";

export function addLayout(program: Command): void {
  program
    .command("layout")
    .description(
      "Say where to put the sensors: the midline's expected error, the best places, how many it takes.",
    )
    .requiredOption("--rig <name>", "rig file, by name under config/rigs or by path")
    .option("--sensors <number>", "how many to place; as many as the rig has if left out", wholeNumber)
    .addOption(
      new Option("--wave <name>", "how the body swims")
        .choices(["carangiform", "anguilliform"])
        .default("carangiform"),
    )
    .option(
      "--envelope <numbers>",
      "amplitude instead of the wave's, in body lengths: coefficients of 1, x, x² ..., x from 0 nose to 1 tail",
      numbers,
    )
    .option("--wavelength <number>", "instead of the wave's, in body lengths", positiveNumber)
    .option("--noise-deg <numbers>", "a sensor's error of inclination and of heading, RMS", numbers, [0.7, 1])
    .option(
      "--range-percent <numbers>",
      "where sensors can sit, from and to: 5,95 if left out, or as far as the rig's own reach",
      numbers,
    )
    .option(
      "--spacing-percent <number>",
      "least distance between two sensors: 3 if left out, or as close as the rig's own",
      positiveNumber,
    )
    .option("--error-percent <number>", "say how many sensors keep within this error", positiveNumber)
    .option("--picture <file>", "draw the best places, as SVG")
    .option("--json", "print everything as JSON, lengths in body lengths", false)
    .action(runLayout);
}

function runLayout(options: LayoutOptions): void {
  const rig = loadRig(options.rig);
  const gait = gaitOf(options);
  const present = rig.sensors.map(({ station }) => station);
  const range = rangeOf(options, present);
  const count = countOf(options.sensors ?? present.length, range);
  const subject = subjectOf(rig, options, gait, range);
  // Before the search: a picture that cannot be written is told at once.
  if (options.picture !== undefined) write(options.picture, "");
  const { interpolation } = rig.midline;
  const plan = planPlacement({
    gait,
    noise: {
      inclination: subject.noiseDeg.inclination * RAD_PER_DEG,
      heading: subject.noiseDeg.heading * RAD_PER_DEG,
    },
    pointCount: POINT_COUNT,
    rebuilding: (stations) => rebuildingBy(interpolation, stations),
    range,
    present,
    count,
  });
  if (options.picture !== undefined)
    write(options.picture, drawPlan({ ...subject, body: rig.body, gait }, plan));
  console.log(options.json ? asJson(subject, plan) : describePlan(subject, plan));
}

/** The midline as the rig has it, swimming steadily at a beat a second where a wave is to be learned. */
function rebuildingBy(
  interpolation: RigFile["midline"]["interpolation"],
  stations: readonly number[],
): Rebuilding {
  const midline = new Midline({ lengthM: 1, stations, pointCount: POINT_COUNT, interpolation });
  let beats = 0;
  return {
    positions: midline.positions,
    step(orientations, trust, phase) {
      if (phase === undefined) return midline.step(orientations, trust);
      const stepS = phase / (2 * Math.PI) - beats;
      beats += stepS;
      midline.step(orientations, trust, stepS, { phase, periodicShare: 1 });
    },
  };
}

function asJson(subject: PlanSubject, plan: PlacementPlan): string {
  const { present, chosen, byCount } = plan;
  const { wantedError } = subject;
  const brief = ({ stations, error: { local, ...error } }: Placement) => ({ stations, error });
  const document = {
    ...subject,
    present,
    even: chosen.even,
    best: chosen.best,
    byCount: byCount.map(({ count, even, best }) => ({ count, even: brief(even), best: brief(best) })),
    leastSensors:
      wantedError === null
        ? null
        : { even: leastCount(plan, "even", wantedError), best: leastCount(plan, "best", wantedError) },
  };
  return JSON.stringify(document, (_, value) => (value instanceof Float64Array ? [...value] : value), 2);
}

/** @throws BendwatchError FILE_UNWRITABLE */
function write(path: string, text: string): void {
  try {
    writeFileSync(path, text);
  } catch (cause) {
    throw new BendwatchError(
      "FILE_UNWRITABLE",
      { where: path, found: (cause as Error).message, expected: "a file that can be written" },
      { cause },
    );
  }
}
