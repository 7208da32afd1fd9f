/**
 * Gait numbers, cycle by cycle: every sweep's midline is kept across the travel axis; when the tail has ended a beat, the
 * numbers of exactly that cycle are computed from what was kept. Nothing is allocated per sweep.
 */
import { TRUST } from "../sweep.ts";
import { DOUBT, GAIT_NUMBERS, type GaitNumber } from "../wire/gait.ts";
import { CycleFit, HARMONICS, TERMS } from "./cycle-fit.ts";
import { CycleMemory } from "./cycle-memory.ts";
import { createGaitCycle, type GaitCycle, RecentCycles } from "./gait-cycle.ts";
import { peakToPeak } from "./peak-to-peak.ts";
import { PhaseAlongBody } from "./phase-along-body.ts";
import { type Bout, SteadyBout, type SteadyCriterion } from "./steady-bout.ts";
import { SLOWEST_BEAT_S, TailbeatMeter } from "./tailbeat.ts";
import { travellingIndex } from "./travelling-index.ts";

/** A cycle is doubted when more than this share of its sweeps has a sensor bridged (or clipped): the fit outvotes fewer. */
const DOUBTED_SHARE = 0.1;
/** Below this travelling index the phase jumps at nodes, and no straight line goes through it. */
const LEAST_TRAVELLING_INDEX = 0.1;
/** Beyond half a turn between two sensors the wave could be a turn shorter as well; near it, noise decides which. */
const GREATEST_LAG_BETWEEN_SENSORS = 0.8 * Math.PI;

/** What a cycle's shape hangs on hangs on every sensor: all numbers but the two that know of no shape. */
const OF_THE_SHAPE = GAIT_NUMBERS.filter((name) => name !== "frequencyHz" && name !== "reynolds");
const OF_THE_WAVE: readonly GaitNumber[] = ["phaseLag", "wavelengthM", "waveSpeedMPerS", "slip"];
const OF_THE_FLOW: readonly GaitNumber[] = ["strouhal", "slip", "reynolds"];

/** What a sensor's trust says against the cycle. */
const DOUBT_OF_TRUST: readonly (readonly [trust: number, doubt: number])[] = [
  [TRUST.LOST, DOUBT.SENSOR_LOST],
  [TRUST.BRIDGED, DOUBT.BRIDGED],
  [TRUST.CLIPPED, DOUBT.CLIPPED],
  [TRUST.SETTLING, DOUBT.SETTLING],
  [TRUST.HEADING_UNAIDED, DOUBT.HEADING_UNAIDED],
];

export interface GaitOptions {
  /** Sweeps a second, nominal. */
  readonly rateHz: number;
  readonly lengthM: number;
  /** Of the midline. */
  readonly pointCount: number;
  /** Of the sensors. */
  readonly stations: readonly number[];
  /** Speed of the water past the body, m/s; NaN when not known. */
  readonly flowMPerS: number;
  /** Of the water, m²/s; NaN when not known. */
  readonly viscosityM2PerS: number;
  /** How many cycles the spread is taken over. */
  readonly spreadCycles: number;
  readonly steady: SteadyCriterion;
  /** A cycle is complete. Borrowed: one record is reused. */
  readonly onCycle: (cycle: GaitCycle) => void;
  /** A steady bout has ended. */
  readonly onBout: (bout: Bout) => void;
}

export class GaitMeter {
  readonly tailbeat: TailbeatMeter;
  readonly bout: SteadyBout;
  /** The newest; its numbers are NaN before the first. Borrowed. */
  readonly cycle: GaitCycle;
  readonly #options: GaitOptions;
  readonly #memory: CycleMemory;
  readonly #fit: CycleFit;
  readonly #phase: PhaseAlongBody;
  readonly #recent: RecentCycles;

  constructor(options: GaitOptions) {
    const { rateHz, lengthM, pointCount, spreadCycles, steady } = options;
    this.#options = options;
    this.tailbeat = new TailbeatMeter({ lengthM });
    this.bout = new SteadyBout(steady);
    this.cycle = createGaitCycle(pointCount);
    // A row: the lateral position of every point, then the bend.
    this.#memory = new CycleMemory(rateHz, SLOWEST_BEAT_S, pointCount + 1);
    this.#fit = new CycleFit(this.#memory);
    this.#phase = new PhaseAlongBody(pointCount, lengthM);
    this.#recent = new RecentCycles(spreadCycles);
  }

  /**
   * Takes one sweep.
   * @param timeS hub time, s, increasing
   * @param positions 3 per point, m, earth axes, nose first
   * @param axis east and north share of the travel axis's unit vector
   * @param trust of each sensor, as in sweep.ts
   */
  step(timeS: number, positions: Float64Array, axis: Float64Array, trust: Uint8Array): void {
    const { pointCount } = this.#options;
    const { values } = this.#memory;
    const at = this.#memory.begin(timeS, doubtsOf(trust));
    const east = axis[0];
    const north = axis[1];
    for (let point = 0; point < pointCount; point++) {
      values[at + point] = east * positions[3 * point + 1] - north * positions[3 * point];
    }
    values[at + pointCount] = bendOf(positions);
    const wasBeating = this.tailbeat.periodS !== null;
    if (this.tailbeat.step(timeS, values[at + pointCount - 1])) this.#endCycle();
    else if (wasBeating && this.tailbeat.periodS === null) this.finish();
  }

  /** The body has stopped, or the run is over: the steady bout under way ends. */
  finish(): void {
    this.#recent.clear();
    this.#tellBout(this.bout.end());
  }

  #tellBout(bout: Bout | null): void {
    if (bout !== null) this.#options.onBout(bout);
  }

  #endCycle(): void {
    const { cycle } = this;
    const { startS, endS, frequencyHz } = this.tailbeat.lastBeat!;
    cycle.startS = startS;
    cycle.endS = endS;
    this.#fit.fit(startS, endS);
    this.#phase.read(this.#fit);
    cycle.sweeps = this.#fit.sweeps;
    this.#measure(frequencyHz);
    this.#doubt();
    this.#recent.add(cycle);
    const ended = this.bout.add(cycle);
    this.#tellBout(ended);
    this.#options.onCycle(cycle);
  }

  #measure(frequencyHz: number): void {
    const { numbers, envelopeM } = this.cycle;
    const { pointCount, lengthM, flowMPerS, viscosityM2PerS } = this.#options;
    const { terms, harmonics } = this.#fit;
    const fitted = harmonics > 0;
    for (let point = 0; point < pointCount; point++) {
      envelopeM[point] = fitted ? 0.5 * peakToPeak(terms, point) : Number.NaN;
    }
    numbers.frequencyHz = frequencyHz;
    numbers.tailAmplitudeM = 2 * envelopeM[pointCount - 1];
    numbers.headAmplitudeM = 2 * envelopeM[0];
    numbers.phaseLag = this.#phase.phaseLag;
    numbers.wavelengthM = this.#phase.wavelengthM;
    numbers.waveSpeedMPerS = numbers.wavelengthM * frequencyHz;
    numbers.travellingIndex = travellingIndex(terms, pointCount);
    numbers.meanBend = fitted ? terms[pointCount * TERMS] : Number.NaN;
    const flow = flowMPerS > 0 ? flowMPerS : Number.NaN;
    numbers.strouhal = (frequencyHz * numbers.tailAmplitudeM) / flow;
    numbers.slip = flow / numbers.waveSpeedMPerS;
    numbers.reynolds = (flow * lengthM) / viscosityM2PerS;
  }

  #doubt(): void {
    const { numbers, doubts } = this.cycle;
    const { stations, flowMPerS, viscosityM2PerS } = this.#options;
    const phase = this.#phase;
    const few = this.#fit.harmonics < HARMONICS ? DOUBT.TOO_FEW_SWEEPS : 0;
    const seen = this.#doubtsOfSweeps();
    for (const name of GAIT_NUMBERS) doubts[name] = 0;
    doubts.frequencyHz = few | (seen & DOUBT.SETTLING);
    for (const name of OF_THE_SHAPE) doubts[name] |= few | (seen & ~DOUBT.HEADING_UNAIDED);
    doubts.meanBend |= seen & DOUBT.HEADING_UNAIDED;
    if (this.#fit.harmonics > 0) {
      if (!phase.swings(0, this.#fit)) {
        doubts.headAmplitudeM |= DOUBT.BELOW_NOISE;
        doubts.phaseLag |= DOUBT.BELOW_NOISE;
      }
      const standing = numbers.travellingIndex < LEAST_TRAVELLING_INDEX ? DOUBT.STANDING_WAVE : 0;
      const ofWave = standing | this.#spacing(stations) | (phase.enough ? 0 : DOUBT.BELOW_NOISE);
      for (const name of OF_THE_WAVE) doubts[name] |= ofWave;
    }
    if (!(flowMPerS > 0)) for (const name of OF_THE_FLOW) doubts[name] |= DOUBT.NO_FLOW_SPEED;
    if (Number.isNaN(viscosityM2PerS)) doubts.reynolds |= DOUBT.NO_WATER_TEMPERATURE;
  }

  #spacing(stations: readonly number[]): number {
    for (let i = 1; i < stations.length; i++) {
      const growth = this.#phase.growth(stations[i - 1], stations[i]);
      if (growth > GREATEST_LAG_BETWEEN_SENSORS) return DOUBT.SENSORS_SPARSE;
    }
    return 0;
  }

  /** What enough of the cycle's sweeps say. A lost sensor's neighbours stand in for it, so that one sweep is enough. */
  #doubtsOfSweeps(): number {
    const memory = this.#memory;
    const { startS, endS } = this.cycle;
    const first = memory.firstSince(startS);
    const end = memory.firstSince(endS);
    let doubts = 0;
    for (const [, bit] of DOUBT_OF_TRUST) {
      let sweeps = 0;
      for (let row = first; row < end; row++) if ((memory.doubtsOf(row) & bit) !== 0) sweeps++;
      const enough = bit === DOUBT.SENSOR_LOST ? 0 : DOUBTED_SHARE * (end - first);
      if (sweeps > enough) doubts |= bit;
    }
    return doubts;
  }
}

function doubtsOf(trust: Uint8Array): number {
  let doubts = 0;
  for (let sensor = 0; sensor < trust.length; sensor++) doubts |= BIT_OF_TRUST[trust[sensor]];
  return doubts;
}

/** DOUBT_OF_TRUST by trust, for the way that every sweep goes. */
const BIT_OF_TRUST = new Uint16Array(256);
for (const [trust, doubt] of DOUBT_OF_TRUST) BIT_OF_TRUST[trust] = doubt;

/** Heading of the first piece of the midline less that of the last, rad, seen from above. */
function bendOf(positions: Float64Array): number {
  const last = positions.length - 3;
  const noseX = positions[0] - positions[3];
  const noseY = positions[1] - positions[4];
  const tailX = positions[last - 3] - positions[last];
  const tailY = positions[last - 2] - positions[last + 1];
  return Math.atan2(tailX * noseY - tailY * noseX, tailX * noseX + tailY * noseY);
}
