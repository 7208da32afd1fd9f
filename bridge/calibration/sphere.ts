/** How much of all directions has been seen, and which sides are missing. */

/** Directions the sphere is judged by. */
export const CELLS = 100;
/** Below this share a side counts as missing. */
const SIDE_SEEN = 0.5;

const SIDES = [
  ["x", 0, 1],
  ["x", 0, -1],
  ["y", 1, 1],
  ["y", 1, -1],
  ["z", 2, 1],
  ["z", 2, -1],
] as const;

/** Evenly spread directions: a Fibonacci lattice, z from one pole to the other. */
export const DIRECTIONS: readonly (readonly [number, number, number])[] = Array.from(
  { length: CELLS },
  (_, k) => {
    const z = 1 - (2 * k + 1) / CELLS;
    const angle = k * Math.PI * (3 - Math.sqrt(5));
    const level = Math.sqrt(1 - z * z);
    return [level * Math.cos(angle), level * Math.sin(angle), z] as const;
  },
);

/** The cell that a vector at `at`, of any length, points into. */
export function cellOf(v: ArrayLike<number>, at = 0): number {
  let nearest = 0;
  let most = Number.NEGATIVE_INFINITY;
  for (let k = 0; k < CELLS; k++) {
    const d = DIRECTIONS[k]!;
    const along = d[0] * v[at]! + d[1] * v[at + 1]! + d[2] * v[at + 2]!;
    if (along > most) [nearest, most] = [k, along];
  }
  return nearest;
}

/** Share of the cells seen, 0 to 1. */
export function shareSeen(seen: readonly boolean[]): number {
  return seen.filter(Boolean).length / CELLS;
}

/** The sides that the field has hardly looked out of, in words. */
export function describeMissing(seen: readonly boolean[]): string {
  return SIDES.filter(([, axis, sign]) => {
    // A side: within 45° of its axis.
    const cells = DIRECTIONS.map((d, k) => [sign * d[axis]!, seen[k]!] as const).filter(
      ([z]) => z > Math.SQRT1_2,
    );
    return cells.filter(([, isSeen]) => isSeen).length < SIDE_SEEN * cells.length;
  })
    .map(([name, , sign]) => `the field ${sign > 0 ? "along" : "against"} its ${name} axis`)
    .join(", ");
}
