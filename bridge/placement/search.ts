/**
 * The best places for a number of sensors: coordinate descent. From nose to tail each sensor is moved to where the cost is
 * least between its neighbours; then all are moved on together as far again as the round has moved them, if that is better
 * still; and so on until a round gains next to nothing. The first rounds look everywhere between the neighbours, later
 * ones nearby. Nothing in it is random.
 */

/** Where sensors can sit, as shares of body length. */
export interface MountableRange {
  readonly from: number;
  readonly to: number;
  /** Least distance from one sensor to the next. */
  readonly spacing: number;
}

/** What a placement costs; stations ascend. */
export type Cost = (stations: readonly number[]) => number;

interface Candidate {
  readonly stations: readonly number[];
  readonly cost: number;
}

/**
 * Looks for the least cost in low..high, knowing that a sensor is now at `place`; `cost` is told every place that is tried
 * and keeps the best.
 */
type Look = (low: number, high: number, place: number, cost: (place: number) => number) => void;

/** Rounds that each start is given before the better goes on. */
const FIRST_ROUNDS = 2;
const LATER_ROUNDS = 40;
/** Nearby: so far to either side, as a share of body length. */
const NEARBY = 0.005;
/** A round that lowers the cost by less than this share is the last. */
const ENOUGH = 2e-4;
/** Pieces that the way between two neighbours is looked at in, before the best of them is narrowed down ... */
const SCANNED = 6;
/** ... to this share of body length: the cost is flat about its least. */
const PLACE_TOLERANCE = 3e-3;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

/** How many sensors fit. */
export function mostSensors({ from, to, spacing }: MountableRange): number {
  return 1 + Math.floor((to - from) / spacing + 1e-9);
}

/** Evenly spaced over the whole range; one alone in its middle. */
export function evenPlacement(count: number, { from, to }: MountableRange): number[] {
  if (count === 1) return [(from + to) / 2];
  return Array.from({ length: count }, (_, i) => from + ((to - from) * i) / (count - 1));
}

/**
 * Several starts, since a sensor at either end of the range can be stuck there: spread over the whole range, each in the
 * middle of its share of it, and a placement that is known.
 * @param count at most as many as fit
 * @param known as many stations, or none
 * @returns stations that cost no more than the even ones, nor than the known ones if those are possible
 */
export function bestPlacement(
  count: number,
  range: MountableRange,
  cost: Cost,
  known?: readonly number[],
): readonly number[] {
  const margin = (range.to - range.from) / (2 * count);
  const inner = { ...range, from: range.from + margin, to: range.to - margin };
  const starts = [evenPlacement(count, range), evenPlacement(count, inner), ...(known ? [known] : [])]
    .filter((stations) => isPossible(stations, range))
    .map((stations) => improve({ stations, cost: cost(stations) }, FIRST_ROUNDS, lookBetween, range, cost));
  const better = starts.reduce((a, b) => (b.cost < a.cost ? b : a));
  return improve(better, LATER_ROUNDS, lookNearby, range, cost).stations;
}

function improve(start: Candidate, rounds: number, look: Look, range: MountableRange, cost: Cost): Candidate {
  let best = start;
  for (let i = 0; i < rounds; i++) {
    const before = best;
    best = round(before, look, range, cost);
    if (best.cost > (1 - ENOUGH) * before.cost) break;
  }
  return best;
}

/** Moves every sensor once, then all together. */
function round(start: Candidate, look: Look, range: MountableRange, cost: Cost): Candidate {
  let best = start;
  const consider = (stations: readonly number[]) => {
    const candidate = { stations, cost: cost(stations) };
    if (candidate.cost < best.cost) best = candidate;
    return candidate.cost;
  };
  const last = start.stations.length - 1;
  for (let i = 0; i <= last; i++) {
    const { stations } = best;
    const low = i === 0 ? range.from : stations[i - 1] + range.spacing;
    const high = i === last ? range.to : stations[i + 1] - range.spacing;
    look(low, high, stations[i], (station) => consider(replaced(stations, i, station)));
  }
  const further = best.stations.map((station, i) => 2 * station - start.stations[i]);
  if (isPossible(further, range)) consider(further);
  return best;
}

function replaced(stations: readonly number[], i: number, station: number): number[] {
  return stations.map((before, k) => (k === i ? station : before));
}

/** To rounding: sensors that only just fit do fit. */
export function isPossible(stations: readonly number[], { from, to, spacing }: MountableRange): boolean {
  return stations.every(
    (station, i) =>
      station >= from - 1e-9 &&
      station <= to + 1e-9 &&
      (i === 0 || station - stations[i - 1] >= spacing - 1e-9),
  );
}

/** At evenly spaced places, then by golden section about the best of them. */
function lookBetween(low: number, high: number, _: number, cost: (place: number) => number): void {
  const step = (high - low) / SCANNED;
  const costs = Array.from({ length: SCANNED + 1 }, (_, i) => cost(low + i * step));
  const best = low + costs.indexOf(Math.min(...costs)) * step;
  let from = Math.max(low, best - step);
  let to = Math.min(high, best + step);
  let left = to - GOLDEN * (to - from);
  let right = from + GOLDEN * (to - from);
  let atLeft = cost(left);
  let atRight = cost(right);
  while (to - from > PLACE_TOLERANCE) {
    if (atLeft < atRight) {
      to = right;
      right = left;
      atRight = atLeft;
      left = to - GOLDEN * (to - from);
      atLeft = cost(left);
    } else {
      from = left;
      left = right;
      atLeft = atRight;
      right = from + GOLDEN * (to - from);
      atRight = cost(right);
    }
  }
}

/** Where the parabola through this place and one to either side has its least. */
function lookNearby(low: number, high: number, place: number, cost: (place: number) => number): void {
  const ahead = Math.max(low, place - NEARBY);
  const behind = Math.min(high, place + NEARBY);
  const here = cost(place);
  const riseAhead = (cost(ahead) - here) / (ahead - place);
  const riseBehind = (cost(behind) - here) / (behind - place);
  const curvature = (riseBehind - riseAhead) / (behind - ahead);
  if (!(curvature > 0)) return;
  const slope = riseAhead + curvature * (place - ahead);
  cost(Math.min(high, Math.max(low, place - slope / (2 * curvature))));
}
