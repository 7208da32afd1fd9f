/** How the whole body is held while it lies straight and still. */
import { DEG_PER_RAD } from "../numeric/units.ts";
import { cross, unit } from "./attitude-fit.ts";

/** How the body is held. Level, unless it says otherwise. */
export interface BodyPose {
  /** Nose up positive, rad. */
  readonly pitch: number;
  /** Right side down positive, rad. */
  readonly roll: number;
}

export const LEVEL: BodyPose = { pitch: 0, roll: 0 };

/** Up in body axes. */
export function upOf({ pitch, roll }: BodyPose): Float64Array {
  return Float64Array.of(Math.sin(pitch), Math.cos(pitch) * Math.sin(roll), Math.cos(pitch) * Math.cos(roll));
}

/** Magnetic east in body axes. @param bearing of the nose, rad clockwise from magnetic north */
export function eastOf(pose: BodyPose, bearing: number): Float64Array {
  // Unrolled, the nose's level direction and left are known; left is square to up and to the nose.
  const up = upOf(pose);
  const left = unit(cross(up, [1, 0, 0]));
  const ahead = cross(left, up);
  return Float64Array.from([0, 1, 2], (k) => Math.sin(bearing) * ahead[k]! - Math.cos(bearing) * left[k]!);
}

/** In words, degrees. */
export function describePose({ pitch, roll }: BodyPose): string {
  const parts = [
    [pitch, "nose up", "nose down"],
    [roll, "right side down", "left side down"],
  ] as const;
  const words = parts.flatMap(([angle, positive, negative]) =>
    Math.abs(angle) < 1e-6
      ? []
      : [`${Math.round(Math.abs(angle) * DEG_PER_RAD)}° ${angle > 0 ? positive : negative}`],
  );
  return words.length === 0 ? "level" : words.join(" and ");
}
