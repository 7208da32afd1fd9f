/**
 * The attitude of the travelling frame (heading, then pitch, then roll) and what follows from its motion, all analytic:
 * the frame's orientation, its angular velocity and acceleration in its own axes, and the acceleration of a point that
 * moves in it.
 */
import { multiply } from "../numeric/quaternion.ts";
import { type Jet, newJet } from "./signal.ts";

export class AttitudeMotion {
  /** rad; set these, then call update. */
  readonly heading = newJet();
  /** Nose up positive. */
  readonly pitch = newJet();
  /** Right side down positive. */
  readonly roll = newJet();

  /** Frame to earth, scalar first. */
  readonly orientation = new Float64Array(4);
  /** rad/s, frame axes. */
  readonly angularVelocity = new Float64Array(3);
  /** rad/s², frame axes. */
  readonly angularAcceleration = new Float64Array(3);
  readonly #turn = new Float64Array(4);
  readonly #up = new Float64Array(3);

  /** Works out orientation and angular motion from heading, pitch and roll. */
  update(): void {
    this.#setOrientation();
    const { heading, pitch, roll, angularVelocity, angularAcceleration } = this;
    const cp = Math.cos(pitch.value);
    const sp = Math.sin(pitch.value);
    const cr = Math.cos(roll.value);
    const sr = Math.sin(roll.value);
    const h = heading.rate;
    const p = pitch.rate;
    const r = roll.rate;

    angularVelocity[0] = r + h * sp;
    angularVelocity[1] = -p * cr + h * cp * sr;
    angularVelocity[2] = p * sr + h * cp * cr;

    angularAcceleration[0] = roll.acceleration + heading.acceleration * sp + h * p * cp;
    angularAcceleration[1] =
      -pitch.acceleration * cr +
      p * r * sr +
      heading.acceleration * cp * sr -
      h * p * sp * sr +
      h * r * cp * cr;
    angularAcceleration[2] =
      pitch.acceleration * sr +
      p * r * cr +
      heading.acceleration * cp * cr -
      h * p * sp * cr -
      h * r * cp * sr;

    this.#up[0] = sp;
    this.#up[1] = cp * sr;
    this.#up[2] = cp * cr;
  }

  /** out = the earth's upward direction, frame axes. */
  up(out: Float64Array): void {
    out.set(this.#up);
  }

  /** out = acceleration, m/s², frame axes, of a point `behind` the origin and `lateral` to its left: relative, Coriolis, Euler and centripetal. */
  pointAcceleration(behind: Jet, lateral: Jet, out: Float64Array): void {
    const [wx, wy, wz] = this.angularVelocity;
    const [ax, ay, az] = this.angularAcceleration;
    const x = -behind.value;
    const vx = -behind.rate;
    const y = lateral.value;
    const vy = lateral.rate;
    const along = wx * x + wy * y;
    const squared = wx * wx + wy * wy + wz * wz;
    out[0] = -behind.acceleration - 2 * wz * vy - az * y + wx * along - squared * x;
    out[1] = lateral.acceleration + 2 * wz * vx + az * x + wy * along - squared * y;
    out[2] = 2 * (wx * vy - wy * vx) + ax * y - ay * x + wz * along;
  }

  #setOrientation(): void {
    const turn = this.#turn;
    setTurn(this.orientation, 3, this.heading.value);
    setTurn(turn, 2, -this.pitch.value);
    multiply(this.orientation, this.orientation, turn);
    setTurn(turn, 1, this.roll.value);
    multiply(this.orientation, this.orientation, turn);
  }
}

/** out = a turn by `angle` about x (1), y (2) or z (3). */
export function setTurn(out: Float64Array, axis: 1 | 2 | 3, angle: number): void {
  out.fill(0);
  out[0] = Math.cos(angle / 2);
  out[axis] = Math.sin(angle / 2);
}

/** out = v turned about z; out may be v. */
export function turnAboutZ(v: Float64Array, angle: number, out: Float64Array): void {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  const x = v[0];
  const y = v[1];
  out[0] = c * x - s * y;
  out[1] = s * x + c * y;
  out[2] = v[2];
}

/** out = v turned about x; out may be v. */
export function turnAboutX(v: Float64Array, angle: number, out: Float64Array): void {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  const y = v[1];
  const z = v[2];
  out[0] = v[0];
  out[1] = c * y - s * z;
  out[2] = s * y + c * z;
}
