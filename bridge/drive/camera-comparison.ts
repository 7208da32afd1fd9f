/** The bridge's midline beside a camera's: displacement across the travel axis, station by station. */
import type { CameraTrack } from "./camera-track.ts";
import { Comparison } from "./comparison.ts";
import { COMPARED_PLACES, COMPARED_STATIONS, lateralsInto, stationsFromNoseInto } from "./stations.ts";

/** A station moves when half its range is at least this, m. */
const LEAST_SWAY_M = 0.0005;

/** One station, or all together (station NaN), over a trial. SI. */
export interface BesideCamera {
  readonly station: number;
  readonly gain: number;
  /** Positive when the bridge's midline follows the camera's. */
  readonly lagS: number;
  readonly rmseM: number;
  readonly r2: number;
}

export class CameraComparison {
  readonly comparison: Comparison;
  readonly #track: CameraTrack;
  readonly #camera = new Float64Array(2 * COMPARED_STATIONS);
  readonly #body = new Float64Array(2 * COMPARED_STATIONS);
  readonly #cameraLateral = new Float64Array(COMPARED_STATIONS);
  readonly #bodyLateral = new Float64Array(COMPARED_STATIONS);

  constructor(track: CameraTrack, rateHz: number) {
    this.#track = track;
    this.comparison = new Comparison({
      rateHz,
      leastMotion: COMPARED_PLACES.map(() => LEAST_SWAY_M),
      against: COMPARED_PLACES.map((_, k) => k),
      chains: [],
      keepOffsets: true,
    });
  }

  /**
   * @param positions of the midline, 3 per point, m, earth axes
   * @param heading of the travel axis, rad
   */
  sweep(timeS: number, positions: Float64Array, heading: number): void {
    if (!this.#track.pointsInto(this.#camera, timeS)) return;
    stationsFromNoseInto(this.#body, positions);
    lateralsInto(this.#cameraLateral, this.#camera, heading);
    lateralsInto(this.#bodyLateral, this.#body, heading);
    this.comparison.push(timeS, this.#cameraLateral, this.#bodyLateral);
  }

  /** The trial so far, by station. NaN where nothing moved. */
  stations(): BesideCamera[] {
    const { gain, lagS, rmse, r2 } = this.comparison.trial.figures();
    return COMPARED_PLACES.map((station, k) => ({
      station,
      gain: gain[k],
      lagS: lagS[k],
      rmseM: rmse[k],
      r2: r2[k],
    }));
  }

  /** All stations together. */
  overall(): BesideCamera {
    const { gain, lagS, rmse, r2 } = this.comparison.trial.overall();
    return { station: Number.NaN, gain, lagS, rmseM: rmse, r2 };
  }
}
