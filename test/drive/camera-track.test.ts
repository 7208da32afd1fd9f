import { describe, expect, test } from "vitest";
import { AlignmentSums, CameraTrack } from "../../bridge/drive/camera-track.ts";

const PLACES = [0, 0.5, 1];
/** Points of a slightly bent body of 2 units' length, at even stations, nose at (5, 1). */
const STATIONS = Array.from({ length: 21 }, (_, i) => i / 20);
const bent = (bend: number) => STATIONS.flatMap((s) => [5 - 2 * s, 1 + bend * s * s]);

function trackOf(frames: readonly { timeS: number; bend: number }[], lengthM = 1): CameraTrack {
  const timeS = Float64Array.from(frames, (frame) => frame.timeS);
  const points = Float64Array.from(frames.flatMap(({ bend }) => bent(bend)));
  return new CameraTrack({ timeS, stations: STATIONS, points }, PLACES, lengthM);
}

const FRAMES = Array.from({ length: 12 }, (_, i) => ({ timeS: i / 50, bend: 0.02 * Math.sin(i) }));

test("the table's unit is scaled so that the mean curve has the body's length", () => {
  const track = trackOf(
    FRAMES.map((frame) => ({ ...frame, bend: 0 })),
    0.64,
  );
  expect(track.scale).toBeCloseTo(0.32, 12);
  const out = new Float64Array(6);
  expect(track.pointsInto(out, 0.1)).toBe(true);
  [0, 0, -0.32, 0, -0.64, 0].forEach((value, i) => {
    expect(out[i]).toBeCloseTo(value, 12);
  });
});

test("between frames it is the cubic through four of them", () => {
  const cubic = (t: number) => 0.02 + 0.3 * t - 4 * t ** 3;
  const track = trackOf(Array.from({ length: 12 }, (_, i) => ({ timeS: i / 50, bend: cubic(i / 50) })));
  const out = new Float64Array(6);
  for (const timeS of [0, 0.005, 0.111, 0.2199, 0.22, 0.05]) {
    expect(track.pointsInto(out, timeS)).toBe(true);
    expect(out[5]! / track.scale).toBeCloseTo(cubic(timeS), 10);
  }
});

test("outside the frames, and where frames are missing, there is nothing", () => {
  const track = trackOf(FRAMES.filter((_, i) => i < 4 || i > 7));
  const out = new Float64Array(6);
  expect([-0.01, 0.05, 0.1, 0.17, 0.221].map((timeS) => track.pointsInto(out, timeS))).toEqual([
    false,
    true,
    false,
    true,
    false,
  ]);
});

describe("the alignment", () => {
  const camera = [bent(0.3), bent(-0.1), bent(0.2)].map((points) => Float64Array.from(points));
  const turned = (points: Float64Array, angle: number, mirror = 1) =>
    Float64Array.from(points, (_, i) => {
      const [x, y] = i % 2 === 0 ? [points[i]!, points[i + 1]!] : [points[i - 1]!, points[i]!];
      const [cos, sin] = [Math.cos(angle), Math.sin(angle)];
      return i % 2 === 0 ? cos * x - sin * y * mirror + 0.7 : sin * x + cos * y * mirror - 0.2;
    });

  test("is the turn and shift that were made", () => {
    const sums = new AlignmentSums();
    for (const points of camera) sums.add(points, turned(points, 2.4));
    const { turn, shift, residualM } = sums.solve()!;
    expect(turn).toBeCloseTo(2.4, 10);
    expect(shift[0]).toBeCloseTo(0.7, 10);
    expect(shift[1]).toBeCloseTo(-0.2, 10);
    // The square root of rounding.
    expect(residualM).toBeLessThan(1e-6);
  });

  test("tells a mirrored camera by what is left", () => {
    const sums = new AlignmentSums();
    for (const points of camera) sums.add(points, turned(points, 2.4, -1));
    const { residualM, mirroredResidualM } = sums.solve()!;
    expect(residualM).toBeGreaterThan(0.05);
    expect(mirroredResidualM).toBeLessThan(1e-6);
  });

  test("of nothing is none", () => {
    expect(new AlignmentSums().solve()).toBeNull();
  });

  test("lays every frame where it belongs", () => {
    const track = trackOf(FRAMES);
    const before = new Float64Array(6);
    const after = new Float64Array(6);
    track.pointsInto(before, 0.1);
    track.align({ turn: Math.PI / 2, shift: [1, 2], residualM: 0, mirroredResidualM: 0 });
    track.pointsInto(after, 0.1);
    for (let i = 0; i < 6; i += 2) {
      expect(after[i]).toBeCloseTo(1 - before[i + 1]!, 12);
      expect(after[i + 1]).toBeCloseTo(2 + before[i]!, 12);
    }
  });
});
