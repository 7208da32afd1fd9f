/**
 * From orientations at the stations to the body's midline.
 *
 * The orientation anywhere along the body is interpolated between the sensors on the sphere: `slerp` (slerp.ts), straight
 * beyond the first and last sensor; `smooth` (smooth.ts), which goes on bending there; or `wave` (wave.ts), smooth and
 * what the beat does besides. The midline is a chain of equal straight segments from the nose, each along the body's x axis
 * as interpolated at the segment's middle: whatever the orientations, its length is the body's. Sensors that are lost drop
 * out and their neighbours carry on.
 */
import { TRUST } from "../sweep.ts";
import type { Interpolation, WhySmooth } from "../wire/messages.ts";
import type { Between } from "./between.ts";
import { Slerp } from "./slerp.ts";
import { Smooth } from "./smooth.ts";
import { type Beating, Wave } from "./wave.ts";

export interface MidlineOptions {
  readonly lengthM: number;
  /** Place of each sensor, 0 nose to 1 tail tip, ascending. */
  readonly stations: readonly number[];
  /** Evenly spaced points from nose to tail tip, at least 2. */
  readonly pointCount: number;
  /** Slerp if left out. */
  readonly interpolation?: Interpolation;
}

export class Midline {
  /** 3 per point, m, earth axes, nose at the origin. Borrowed: rewritten by each step. A straight body facing east at first. */
  readonly positions: Float64Array;
  readonly #chosen: Interpolation;
  readonly #segmentM: number;
  /** Places are points and segment middles in turn, nose to tail: place 2k is point k, 2k + 1 the middle of the segment behind it. */
  readonly #placeCount: number;
  readonly #between: Between;
  /** #between, if that is a wave. */
  readonly #wave: Wave | null;
  /** Which sensors are lost, and the indices of those left. */
  readonly #lost: Uint8Array;
  readonly #left: Uint16Array;
  #leftCount = 0;
  #stepped = false;
  /** The body's x axis at the segment's middles, 3 each. */
  readonly #axes: Float64Array;
  readonly #orientation = new Float64Array(4);

  constructor({ lengthM, stations, pointCount, interpolation = "slerp" }: MidlineOptions) {
    this.positions = new Float64Array(pointCount * 3);
    this.#segmentM = lengthM / (pointCount - 1);
    this.#axes = new Float64Array(3 * (pointCount - 1));
    this.#placeCount = 2 * pointCount - 1;
    this.#between = new { slerp: Slerp, smooth: Smooth, wave: Wave }[interpolation](
      stations,
      this.#placeCount,
    );
    this.#wave = this.#between instanceof Wave ? this.#between : null;
    this.#chosen = interpolation;
    this.#lost = new Uint8Array(stations.length);
    this.#left = new Uint16Array(stations.length);
    this.#placeSensors();
    for (let point = 1; point < pointCount; point++) this.positions[3 * point] = -point * this.#segmentM;
  }

  /** What the midline is made by at present: where a wave was asked for, it may be `smooth` for a while. */
  get inUse(): Interpolation {
    return this.whySmooth === null ? this.#chosen : "smooth";
  }

  /** Why a wave that was asked for is not in use; null where it is, or none was asked for. */
  get whySmooth(): WhySmooth | null {
    return this.#wave?.whySmooth ?? null;
  }

  /**
   * Rebuilds `positions`. With every sensor lost, the last shape stays.
   * @param orientations 4 per sensor, body axes to earth
   * @param trust per sensor, as in sweep.ts
   * @param stepS time since the sweep before, s; a wave fades in and out over time
   * @param beating the body's beat at this sweep, for a wave; null where it is not known
   */
  step(orientations: Float64Array, trust: Uint8Array, stepS = 0, beating: Beating | null = null): void {
    if (this.#lossChanged(trust)) this.#placeSensors();
    if (this.#leftCount === 0) return;
    this.#stepped = true;
    this.#between.take(orientations);
    this.#wave?.beat(orientations, this.#lost, stepS, beating);
    this.#between.axes(this.#axes);
    const { positions } = this;
    const axes = this.#axes;
    const segmentM = this.#segmentM;
    let x = 0;
    let y = 0;
    let z = 0;
    positions.fill(0, 0, 3); // whoever took the last shape may have moved it
    for (let at = 0; at < axes.length; at += 3) {
      x -= segmentM * axes[at];
      y -= segmentM * axes[at + 1];
      z -= segmentM * axes[at + 2];
      positions[at + 3] = x;
      positions[at + 4] = y;
      positions[at + 5] = z;
    }
  }

  /**
   * The roll along the body as of the last step, for the display: rad per point, right side down positive. Untouched
   * before the first step.
   */
  rollInto(out: Float32Array | Float64Array): void {
    if (!this.#stepped) return;
    for (let place = 0; place < this.#placeCount; place += 2) {
      this.#between.at(place, this.#orientation);
      out[place >> 1] = rollOf(this.#orientation);
    }
  }

  #lossChanged(trust: Uint8Array): boolean {
    let changed = false;
    for (let i = 0; i < this.#lost.length; i++) {
      const lost = trust[i] === TRUST.LOST ? 1 : 0;
      if (lost !== this.#lost[i]) changed = true;
      this.#lost[i] = lost;
    }
    return changed;
  }

  #placeSensors(): void {
    this.#leftCount = 0;
    for (let i = 0; i < this.#lost.length; i++) if (this.#lost[i] === 0) this.#left[this.#leftCount++] = i;
    if (this.#leftCount > 0) this.#between.place(this.#left, this.#leftCount);
  }
}

/** Angle about the body's x axis after heading and pitch are taken off, rad, right side down positive. */
function rollOf(q: Float64Array): number {
  return Math.atan2(2 * (q[0] * q[1] + q[2] * q[3]), 1 - 2 * (q[1] * q[1] + q[2] * q[2]));
}
