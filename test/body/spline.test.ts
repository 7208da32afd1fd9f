import { expect, test } from "vitest";
import { Spline } from "../../bridge/body/spline.ts";

const STATIONS = [0.06, 0.2, 0.41, 0.58, 0.77, 0.92];
const PLACES = 81;
const all = (count: number) => Uint16Array.from({ length: count }, (_, i) => i);

/** Values along the body of the spline through `values`. */
function along(stations: readonly number[], values: readonly number[], endWeight: number): number[] {
  const spline = new Spline({ stations, placeCount: PLACES, endWeight });
  spline.place(all(stations.length), stations.length);
  const steps = Float64Array.from(values, (value, i) => (values[i + 1] ?? value) - value);
  const slopes = new Float64Array(values.length);
  spline.slopes(steps, 1, slopes);
  return Array.from({ length: PLACES }, (_, place) => {
    const k = spline.base[place];
    return (
      values[k] +
      spline.ofStep[place] * steps[k] +
      spline.ofSlope[place] * slopes[k] +
      spline.ofNextSlope[place] * (slopes[k + 1] ?? 0)
    );
  });
}

test.each([0.5, 1])("a straight line stays one, beyond the ends too (end weight %d)", (endWeight) => {
  for (const stations of [STATIONS, [0.1, 0.9], [0.1, 0.3, 0.9]]) {
    const line = along(
      stations,
      stations.map((s) => 2 - 3 * s),
      endWeight,
    );
    line.forEach((value, place) => {
      expect(value).toBeCloseTo(2 - (3 * place) / (PLACES - 1), 13); // rounding
    });
  }
});

test("with an end weight of 1 a parabola stays one between the sensors", () => {
  const parabola = (s: number) => 1 - 2 * s + 5 * s * s;
  along(STATIONS, STATIONS.map(parabola), 1).forEach((value, place) => {
    const station = place / (PLACES - 1);
    if (station < STATIONS[0] || station > STATIONS[5]) return;
    expect(value).toBeCloseTo(parabola(station), 13); // rounding
  });
});

test("the natural spline is the textbook's", () => {
  // Through (0, 0), (0.5, 1), (1, 0): closed form 3 s - 4 s³ on the first half (from y'' = 0 at 0 and y' = 0 at 0.5).
  along([0, 0.5, 1], [0, 1, 0], 0.5).forEach((value, place) => {
    const station = place / (PLACES - 1);
    const s = Math.min(station, 1 - station);
    expect(value).toBeCloseTo(3 * s - 4 * s ** 3, 13);
  });
});

test("beyond the end sensors the slope goes on for the width of a gap, then the value stays", () => {
  const values = along([0.4, 0.5, 0.6], [0, 1, 2], 0.5);
  expect(values[0]).toBeCloseTo(-1, 13);
  expect(values[24]).toBeCloseTo(-1, 13);
  expect(values[28]).toBeCloseTo(-0.5, 13);
  expect(values[56]).toBeCloseTo(3, 13);
  expect(values[80]).toBeCloseTo(3, 13);
});

test("one sensor: its value everywhere", () => {
  expect(new Set(along([0.4], [7], 0.5))).toEqual(new Set([7]));
});
