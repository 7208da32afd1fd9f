import { expect, test } from "vitest";
import { CameraComparison } from "../../bridge/drive/camera-comparison.ts";
import { CameraTrack } from "../../bridge/drive/camera-track.ts";
import { COMPARED_PLACES } from "../../bridge/drive/stations.ts";

const LENGTH_M = 0.6;
const GAIN = 0.9;
const LAG_S = 0.02;
/** Sideways at a station, m: a standing bend, small beside the length, so that scale and place are not stretched by it. */
const sideways = (station: number, timeS: number) =>
  0.02 * station ** 2 * Math.sin(2 * Math.PI * 1.3 * timeS);

test("gain, lag, RMSE and r2 of a midline that is a known part of the camera's, by station and overall", () => {
  const stations = Array.from({ length: 41 }, (_, i) => i / 40);
  const timeS = Float64Array.from({ length: 60 * 12 }, (_, i) => i / 60);
  const points = Float64Array.from(
    [...timeS].flatMap((t) => stations.flatMap((s) => [-LENGTH_M * s, sideways(s, t)])),
  );
  const track = new CameraTrack({ timeS, stations, points }, COMPARED_PLACES, LENGTH_M);
  const camera = new CameraComparison(track, 100);
  const positions = new Float64Array(3 * 41);
  for (let i = 0; i < 1150; i++) {
    stations.forEach((s, k) => {
      positions[3 * k] = -LENGTH_M * s;
      positions[3 * k + 1] = GAIN * sideways(s, i / 100 - LAG_S);
    });
    camera.sweep(i / 100, positions, 0);
  }
  const angle = 2 * Math.PI * 1.3 * LAG_S;
  const apart = Math.hypot(1 - GAIN * Math.cos(angle), GAIN * Math.sin(angle)) / Math.SQRT2;
  const all = [...camera.stations().slice(3), camera.overall()];
  for (const { gain, lagS, r2 } of all) {
    // The curve is longer than the straight body by less than a thousandth, and is scaled back by that.
    expect(Math.abs(gain / GAIN - 1)).toBeLessThan(0.002);
    expect(Math.abs(lagS - LAG_S)).toBeLessThan(1e-4);
    expect(r2).toBeGreaterThan(0.9999);
  }
  expect(camera.stations()[10]!.rmseM / (0.02 * apart)).toBeCloseTo(1, 2);
  // The nose is held still: nothing to compare.
  expect(camera.stations()[0]!.gain).toBeNaN();
});
