/**
 * Midlines that a camera saw, on the clock of the sweeps: at the compared stations, scaled to the body's length, each
 * relative to its own nose (as the bridge's midline is), and laid upon the bridge's by one turn and one shift.
 */
import { cubicWeights } from "../numeric/cubic.ts";

/** Frames further apart than this many usual intervals have lost too much between them. */
const WIDEST_GAP = 3.5;

/** Frames as a table holds them. */
export interface CameraFrames {
  /** Hub time of each frame, s, increasing. */
  readonly timeS: Float64Array;
  /** Place of each point, 0 nose to 1 tail tip, increasing; at least four. */
  readonly stations: readonly number[];
  /** x and y of each point, frame after frame, in any one unit; y to the left of x seen from above. */
  readonly points: Float64Array;
}

/** One turn and shift for a whole trial: earth = turn (camera) + shift. */
export interface Alignment {
  /** rad, anticlockwise seen from above. */
  readonly turn: number;
  /** m, east and north. */
  readonly shift: readonly [number, number];
  /** RMS distance left between the two midlines' points, m. */
  readonly residualM: number;
  /** The same, had the camera's y been counted the other way. */
  readonly mirroredResidualM: number;
}

export class CameraTrack {
  readonly timeS: Float64Array;
  /** Metres in one unit of the table. */
  readonly scale: number;
  /** x and y of each compared station, frame after frame, m. */
  readonly #points: Float64Array;
  readonly #width: number;
  readonly #widestS: number;
  readonly #weights = new Float64Array(4);
  #at = 0;

  /** @param places compared stations; those beyond the table's first and last point are taken from the end of the curve */
  constructor({ timeS, stations, points }: CameraFrames, places: readonly number[], lengthM: number) {
    this.timeS = timeS;
    this.#width = 2 * places.length;
    this.scale = (lengthM * (stations.at(-1)! - stations[0])) / meanLength(points, stations.length);
    this.#points = new Float64Array(timeS.length * this.#width);
    this.#place(stations, points, places);
    const steps = timeS.slice(1).map((time, i) => time - timeS[i]);
    this.#widestS = WIDEST_GAP * steps.sort()[steps.length >> 1];
  }

  /** Brings every point to the stations compared: along the body by the cubic through four neighbours. */
  #place(stations: readonly number[], points: Float64Array, places: readonly number[]): void {
    const along = Float64Array.from(stations);
    const count = stations.length;
    places.forEach((place, k) => {
      let first = 0;
      while (first + 4 < count && along[first + 2] <= place) first++;
      const inside = Math.min(Math.max(place, along[0]), along[count - 1]);
      cubicWeights(this.#weights, inside, along, first);
      for (let frame = 0; frame < this.timeS.length; frame++) {
        for (const axis of [0, 1]) {
          let value = 0;
          for (let i = 0; i < 4; i++)
            value += this.#weights[i] * points[2 * (frame * count + first + i) + axis];
          this.#points[frame * this.#width + 2 * k + axis] = this.scale * value;
        }
      }
    });
    for (let frame = 0; frame < this.timeS.length; frame++) this.#toNose(frame * this.#width);
  }

  #toNose(at: number): void {
    const noseX = this.#points[at];
    const noseY = this.#points[at + 1];
    for (let i = 0; i < this.#width; i += 2) {
      this.#points[at + i] -= noseX;
      this.#points[at + i + 1] -= noseY;
    }
  }

  /** Turns and shifts all frames. */
  align({ turn, shift }: Alignment): void {
    const cos = Math.cos(turn);
    const sin = Math.sin(turn);
    const points = this.#points;
    for (let i = 0; i < points.length; i += 2) {
      const x = points[i];
      points[i] = cos * x - sin * points[i + 1] + shift[0];
      points[i + 1] = sin * x + cos * points[i + 1] + shift[1];
    }
  }

  /**
   * Writes x and y of each compared station at a moment: the cubic through the two frames before and the two after.
   * @returns false where the camera has no frames around
   */
  pointsInto(out: Float64Array, timeS: number): boolean {
    const times = this.timeS;
    const last = times.length - 1;
    if (!(timeS >= times[0] && timeS <= times[last])) return false;
    if (times[this.#at] > timeS) this.#at = 0;
    while (this.#at + 1 < last && times[this.#at + 1] <= timeS) this.#at++;
    if (times[this.#at + 1] - times[this.#at] > this.#widestS) return false;
    const first = Math.min(Math.max(0, this.#at - 1), last - 3);
    cubicWeights(this.#weights, timeS, times, first);
    out.fill(0);
    for (let frame = 0; frame < 4; frame++) {
      const weight = this.#weights[frame];
      const at = (first + frame) * this.#width;
      for (let i = 0; i < this.#width; i++) out[i] += weight * this.#points[at + i];
    }
    return true;
  }
}

/** Mean length of the curves of all frames. */
function meanLength(points: Float64Array, pointCount: number): number {
  const frames = points.length / (2 * pointCount);
  let sum = 0;
  for (let frame = 0; frame < frames; frame++) {
    for (let i = 1; i < pointCount; i++) {
      const at = 2 * (frame * pointCount + i);
      sum += Math.hypot(points[at] - points[at - 2], points[at + 1] - points[at - 1]);
    }
  }
  return sum / frames;
}

/**
 * The rigid turn and shift that lay one set of points upon another with the least sum of squared distances, in the plane
 * (closed form; Umeyama, IEEE Trans. Pattern Anal. Mach. Intell. 13 (1991) 376, without scale; from memory).
 */
export class AlignmentSums {
  #n = 0;
  readonly #sums = new Float64Array(10);

  /** Takes pairs of points: x and y in turn. */
  add(camera: Float64Array, body: Float64Array): void {
    const s = this.#sums;
    for (let i = 0; i < camera.length; i += 2) {
      const [cx, cy, bx, by] = [camera[i], camera[i + 1], body[i], body[i + 1]];
      this.#n++;
      s[0] += cx;
      s[1] += cy;
      s[2] += bx;
      s[3] += by;
      s[4] += cx * bx;
      s[5] += cy * by;
      s[6] += cx * by;
      s[7] += cy * bx;
      s[8] += cx * cx + cy * cy;
      s[9] += bx * bx + by * by;
    }
  }

  /** @returns null where no pair was taken */
  solve(): Alignment | null {
    if (this.#n === 0) return null;
    const [cx, cy, bx, by, cxbx, cyby, cxby, cybx, cc, bb] = [...this.#sums].map((sum) => sum / this.#n);
    const along = [cxbx - cx * bx, cyby - cy * by];
    const across = [cxby - cx * by, cybx - cy * bx];
    const turn = Math.atan2(across[0] - across[1], along[0] + along[1]);
    const cos = Math.cos(turn);
    const sin = Math.sin(turn);
    const spread = cc - cx * cx - cy * cy + (bb - bx * bx - by * by);
    const left = (dot: number, cross: number) => Math.sqrt(Math.max(0, spread - 2 * Math.hypot(dot, cross)));
    return {
      turn,
      shift: [bx - (cos * cx - sin * cy), by - (sin * cx + cos * cy)],
      residualM: left(along[0] + along[1], across[0] - across[1]),
      mirroredResidualM: left(along[0] - along[1], across[0] + across[1]),
    };
  }
}
