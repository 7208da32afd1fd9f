/** A waving body, exact: orientations at the sensors and the true midline at any phase; what a Midline makes of them. */
import type { Midline } from "../../bridge/body/midline.ts";
import type { GaitName } from "../../bridge/numeric/gaits.ts";
import { type PlaneMotion, WaveDrive, WavePlace } from "../../bridge/rehearsal/body-wave.ts";
import { newJet } from "../../bridge/rehearsal/signal.ts";

/** Sensors from 5 % to 95 % of the body. */
export const evenStations = (count: number): number[] =>
  Array.from({ length: count }, (_, i) => 0.05 + (0.9 * i) / (count - 1));

export class ExactWave {
  /** 4 per sensor, rewritten by moveTo. */
  readonly orientations: Float64Array;
  /** x (ahead) and y (left) of each point against the nose, as shares of the body, rewritten by showTruth. */
  readonly truth: Float64Array;
  readonly #sensors: readonly WavePlace[];
  readonly #points: readonly WavePlace[];
  readonly #drive = new WaveDrive();
  readonly #motion: PlaneMotion = { behind: newJet(), lateral: newJet(), angle: newJet() };
  readonly #amplitude: number;

  constructor(gait: GaitName, stations: readonly number[], pointCount: number, amplitude = 1) {
    this.#sensors = stations.map((station) => new WavePlace(gait, 1, station));
    this.#points = Array.from({ length: pointCount }, (_, k) => new WavePlace(gait, 1, k / (pointCount - 1)));
    this.orientations = new Float64Array(4 * stations.length);
    this.truth = new Float64Array(2 * pointCount);
    this.#amplitude = amplitude;
  }

  moveTo(phase: number): void {
    const motion = this.#motion;
    this.#drive.set({ ...newJet(), value: this.#amplitude }, { ...newJet(), value: phase });
    this.#sensors.forEach((place, i) => {
      place.motion(this.#drive, motion);
      this.orientations[4 * i] = Math.cos(motion.angle.value / 2);
      this.orientations[4 * i + 3] = Math.sin(motion.angle.value / 2);
    });
  }

  /** Works out the true midline at the phase moved to. */
  showTruth(): void {
    const motion = this.#motion;
    let noseLateral = 0;
    this.#points.forEach((place, k) => {
      place.motion(this.#drive, motion);
      if (k === 0) noseLateral = motion.lateral.value;
      this.truth[2 * k] = -motion.behind.value;
      this.truth[2 * k + 1] = motion.lateral.value - noseLateral;
    });
  }
}

export interface Fidelity {
  /** Distance between a point and its true place, nose on nose, RMS over body and cycle, % of body length. */
  readonly distance: number;
  /** The same of the sideways errors, about their mean along the body at each moment. */
  readonly sideways: number;
  /** Tail tip's peak to peak against the nose, over the true one, less one, %. */
  readonly tailAmplitude: number;
}

/**
 * Holds a midline of unit length against the truth over one cycle.
 * @param step moves the midline to the orientations of a phase, rad
 */
export function fidelity(
  midline: Midline,
  wave: ExactWave,
  step: (phase: number) => void,
  startPhase = 0,
): Fidelity {
  const moments = 128;
  const pointCount = wave.truth.length / 2;
  let squares = 0;
  let sideways = 0;
  const tail: number[] = [];
  const trueTail: number[] = [];
  for (let moment = 0; moment < moments; moment++) {
    const phase = startPhase + (2 * Math.PI * moment) / moments;
    wave.moveTo(phase);
    wave.showTruth();
    step(phase);
    const errors = Array.from(
      { length: pointCount },
      (_, k) => midline.positions[3 * k + 1] - wave.truth[2 * k + 1],
    );
    const mean = errors.reduce((sum, error) => sum + error, 0) / pointCount;
    errors.forEach((error, k) => {
      squares += error ** 2 + (midline.positions[3 * k] - wave.truth[2 * k]) ** 2;
      sideways += (error - mean) ** 2;
    });
    tail.push(midline.positions[3 * pointCount - 2]);
    trueTail.push(wave.truth[2 * pointCount - 1]);
  }
  const span = (values: readonly number[]) => Math.max(...values) - Math.min(...values);
  return {
    distance: 100 * Math.sqrt(squares / moments / pointCount),
    sideways: 100 * Math.sqrt(sideways / moments / pointCount),
    tailAmplitude: 100 * (span(tail) / span(trueTail) - 1),
  };
}
