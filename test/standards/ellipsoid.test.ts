/**
 * The ellipsoid fit against an independent one: SciPy's Levenberg-Marquardt least squares (tables/ellipsoid.py) on the same
 * noisy readings, all around and from 60 % of the sphere. No published worked example with its readings was found.
 */
import { expect, test } from "vitest";
import { fitEllipsoid } from "../../bridge/calibration/ellipsoid.ts";
import table from "./tables/ellipsoid.json" with { type: "json" };

test.each(table.cases.map((c, k) => [k, c] as const))(
  "case %i: centre, matrix and residual are SciPy's",
  (_, c) => {
    const fit = fitEllipsoid(c.readings, table.field)!;
    // SciPy's slopes are differences: it stops within some 1e-7 of the minimum, which is flat there.
    c.centre.forEach((value, k) => {
      expect(Math.abs(fit.centre[k]! - value)).toBeLessThan(1e-4);
    });
    c.matrix.forEach((value, k) => {
      expect(Math.abs(fit.matrix[k]! - value)).toBeLessThan(1e-6);
    });
    expect(Math.abs(fit.residual - c.residual)).toBeLessThan(1e-9);
  },
);
