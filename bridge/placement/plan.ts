/** Where to put the sensors: the rig's own places, even ones and the best, what each costs, and how many it takes. */
import {
  ErrorModel,
  type ErrorModelOptions,
  type ExpectedError,
  type OrientationNoise,
} from "./expected-error.ts";
import { bestPlacement, evenPlacement, isPossible, type MountableRange, mostSensors } from "./search.ts";

/** Numbers of sensors that are compared, from one to this. */
const COMPARED_TO = 16;
/**
 * The tail's excursion peaks between two moments: with so many it is off by 0.2 % of itself at most. After six beats a wave
 * has been learned: another six change the error by less than a tenth.
 */
const REPORTED = { moments: 48, noiseMoments: 4, learnedBeats: 6 };
/**
 * While searching. An odd number: half a cycle on, the body is its mirror image and says nothing new. Nothing is learned:
 * for a rig that learns the wave, the places are the best for when it has not.
 */
const SEARCHED = { moments: 5, noiseMoments: 1, learnedBeats: 0 };

export interface PlanOptions extends Omit<ErrorModelOptions, "moments" | "noiseMoments" | "learnedBeats"> {
  readonly range: MountableRange;
  /** The rig's own stations. */
  readonly present: readonly number[];
  /** Sensors to place; at most as many as fit. */
  readonly count: number;
}

export interface Placement {
  /** 0 nose to 1 tail tip. */
  readonly stations: readonly number[];
  readonly error: ExpectedError;
}

export interface CountRow {
  readonly count: number;
  readonly even: Placement;
  readonly best: Placement;
}

export interface PlacementPlan {
  readonly present: Placement;
  /** For the number of sensors asked for. */
  readonly chosen: CountRow;
  /** From one sensor on, as many as are compared and fit, and the number asked for. */
  readonly byCount: readonly CountRow[];
}

/** Measures the rig's placement, and searches the best one for every number of sensors. */
export function planPlacement({ range, present, count, ...model }: PlanOptions): PlacementPlan {
  const reported = new ErrorModel({ ...model, ...REPORTED });
  const searched = new ErrorModel({ ...model, noise: aboutVertical(model.noise), ...SEARCHED });
  const measured = (stations: readonly number[]): Placement => ({
    stations,
    error: reported.expect(stations),
  });
  const cost = (stations: readonly number[]) => searched.expect(stations).total;
  const rowOf = (sensors: number): CountRow => {
    const known = sensors === present.length ? present : undefined;
    const even = measured(evenPlacement(sensors, range));
    const found = measured(bestPlacement(sensors, range, cost, known).map(asWritten));
    // What a learned wave gains differs from place to place: none that is at hand may be better than the one found.
    const others = known !== undefined && isPossible(known, range) ? [even, measured(known)] : [even];
    return { count: sensors, even, best: others.reduce(lesser, found) };
  };
  const compared = Math.min(COMPARED_TO, mostSensors(range));
  const byCount = Array.from({ length: compared }, (_, i) => rowOf(i + 1));
  if (count > compared) byCount.push(rowOf(count));
  const chosen = byCount.find((row) => row.count === count)!;
  return { present: measured(present), chosen, byCount };
}

/**
 * The least number of sensors whose placement of a kind stays within an error, as a share of body length; or null.
 * Counted in hundredths of a percent, as it is read.
 */
export function leastCount(plan: PlacementPlan, kind: "even" | "best", error: number): number | null {
  const within = Math.round(1e4 * error);
  return plan.byCount.find((row) => Math.round(1e4 * row[kind].error.total) <= within)?.count ?? null;
}

const lesser = (a: Placement, b: Placement) => (b.error.total < a.error.total ? b : a);

/** To a thousandth of the body, so that what is measured is what is read and copied. */
function asWritten(station: number): number {
  return Math.round(1000 * station) / 1000;
}

/** The same noise about the vertical alone: either turn displaces the points by about as much, and one costs half. */
function aboutVertical({ inclination, heading }: OrientationNoise): OrientationNoise {
  return { inclination: 0, heading: Math.hypot(inclination, heading) };
}
