import fc from "fast-check";
import { expect, it } from "vitest";
import { identity, inverse, solve, symmetricEigen, times } from "../../bridge/numeric/matrix.ts";

const element = fc.double({ min: -10, max: 10, noNaN: true });
const square = (n: number) => fc.array(element, { minLength: n * n, maxLength: n * n });

function product(a: ArrayLike<number>, b: ArrayLike<number>, n: number): number[] {
  return Array.from({ length: n * n }, (_, k) => {
    const [r, c] = [Math.floor(k / n), k % n];
    let sum = 0;
    for (let i = 0; i < n; i++) sum += a[r * n + i]! * b[i * n + c]!;
    return sum;
  });
}

it("solves a system worked by hand, though its first pivot is zero", () => {
  // y + z = 5, x + z = 4, x + y = 3.
  expect([...solve([0, 1, 1, 1, 0, 1, 1, 1, 0], [5, 4, 3], 3)!]).toEqual([1, 2, 3]);
});

it("says that a singular matrix is one", () => {
  expect(solve([1, 2, 2, 4], [1, 2], 2)).toBeNull();
  expect(inverse(new Float64Array(9), 3)).toBeNull();
});

it("the inverse undoes any well-conditioned matrix", () => {
  fc.assert(
    fc.property(square(4), (a) => {
      // Made diagonally dominant, so that its condition is below a hundred.
      const m = a.map((value, k) => (k % 5 === 0 ? value + 50 * Math.sign(value || 1) : value));
      const back = product(m, inverse(m, 4)!, 4);
      back.forEach((value, k) => {
        expect(Math.abs(value - identity(4)[k]!)).toBeLessThan(1e-12);
      });
    }),
  );
});

it("eigenvectors are orthonormal and put the matrix together again", () => {
  fc.assert(
    fc.property(square(5), (a) => {
      const m = a.map((value, k) => value + a[(k % 5) * 5 + Math.floor(k / 5)]!);
      const { values, vectors } = symmetricEigen(m, 5);
      for (let k = 1; k < 5; k++) expect(values[k]!).toBeLessThanOrEqual(values[k - 1]!);
      for (let r = 0; r < 5; r++) {
        for (let c = 0; c < 5; c++) {
          const sum = values.reduce((s, value, k) => s + value * vectors[k]![r]! * vectors[k]![c]!, 0);
          // Rounding of a few sweeps over numbers up to 100.
          expect(Math.abs(sum - m[5 * r + c]!)).toBeLessThan(1e-11);
          const dot = vectors[r]!.reduce((s, value, k) => s + value * vectors[c]![k]!, 0);
          expect(Math.abs(dot - (r === c ? 1 : 0))).toBeLessThan(1e-12);
        }
      }
    }),
  );
});

it("multiplies a vector by rows", () => {
  expect([...times([1, 2, 3, 4, 5, 6, 7, 8, 9], [1, 0, -1])]).toEqual([-2, -2, -2]);
});
