import { describe, expect, test } from "vitest";
import { Midline } from "../../bridge/body/midline.ts";
import { Wave } from "../../bridge/body/wave.ts";
import {
  arcBetween,
  conjugate,
  multiply,
  rotate,
  toRotationVector,
} from "../../bridge/numeric/quaternion.ts";
import { TRUST } from "../../bridge/sweep.ts";
import { ExactWave, evenStations } from "./exact-wave.ts";

const STATIONS = evenStations(6);
const STEP_S = 0.01;
const TURN = 2 * Math.PI;
const POINTS = 41;
/** Every station is a place. */
const PLACES = 2001;
const placeOf = (station: number) => Math.round(station * (PLACES - 1));
const NONE_LOST = new Uint8Array(6);

/** A wave that has seen so many beats of one a second, and the body at the last sweep. */
function learned(beats: number, shape: (body: ExactWave) => Float64Array = (body) => body.orientations) {
  const wave = new Wave(STATIONS, PLACES);
  wave.place(
    Uint16Array.from(STATIONS, (_, i) => i),
    6,
  );
  const body = new ExactWave("carangiform", STATIONS, POINTS);
  let orientations = new Float64Array(0);
  for (let sweep = 0; sweep < (beats + 0.2) / STEP_S; sweep++) {
    const phase = TURN * STEP_S * sweep;
    body.moveTo(phase);
    orientations = shape(body).slice();
    wave.take(orientations);
    wave.beat(orientations, NONE_LOST, STEP_S, { phase, periodicShare: 1 });
  }
  return { wave, orientations };
}

/** All sensors rolled by 120 deg and pitched by 50, one end of the body by 70 deg more: a steep body, twisted. */
function steep(body: ExactWave): Float64Array {
  const out = new Float64Array(24);
  for (let i = 0; i < 6; i++) {
    const roll = (120 + 14 * i) * (Math.PI / 360);
    const pitch = -50 * (Math.PI / 360);
    multiply(out, [Math.cos(pitch), 0, Math.sin(pitch), 0], body.orientations, 4 * i, 0, 4 * i);
    multiply(out, out, [Math.cos(roll), Math.sin(roll), 0, 0], 4 * i, 4 * i, 0);
  }
  return out;
}

describe.each([
  ["level", (body: ExactWave) => body.orientations],
  ["steep and twisted", steep],
] as const)("a %s body that beats", (_, shape) => {
  test("every sensor's own orientation is met, bend and twist go on through it without a jump, and the axes are those of the orientations", () => {
    const { wave, orientations } = learned(12, shape);
    expect(wave.whySmooth).toBeNull();
    const at = (place: number) => {
      const q = new Float64Array(4);
      wave.at(place, q);
      return q;
    };
    const axes = new Float64Array((3 * (PLACES - 1)) / 2);
    const ahead = new Float64Array(3);
    wave.axes(axes);
    for (let place = 1; place < PLACES; place += 2) {
      rotate(ahead, at(place), [1, 0, 0]);
      // Rounding of two ways to the same axis.
      for (let i = 0; i < 3; i++)
        expect(Math.abs(axes[(3 * (place - 1)) / 2 + i] - ahead[i])).toBeLessThan(1e-14);
    }
    STATIONS.forEach((station, i) => {
      const place = placeOf(station);
      // Rounding, and of the table's few thousand sums.
      expect(arcBetween(at(place), orientations.subarray(4 * i, 4 * i + 4))).toBeLessThan(1e-12);
      const before = rate(at(place - 1), at(place));
      const behind = rate(at(place), at(place + 1));
      // A place apart, the rate changes by its own slope: some 20 rad per L² over 2000.
      for (let axis = 0; axis < 3; axis++) expect(Math.abs(before[axis] - behind[axis])).toBeLessThan(0.03);
    });
  });
});

/** Turn from a to b in a's axes, rad per body length, places one apart. */
function rate(a: Float64Array, b: Float64Array): Float64Array {
  const q = new Float64Array(4);
  const out = new Float64Array(3);
  conjugate(q, a);
  multiply(q, q, b);
  toRotationVector(out, q);
  return out.map((v) => v * (PLACES - 1));
}

interface Moment {
  readonly amplitude?: number;
  readonly periodicShare: number;
  readonly trust?: Uint8Array;
}

/** Steps a wave midline through a run of one beat a second, and a smooth one beside it. */
function swim(
  seconds: number,
  at: (timeS: number) => Moment,
  observe: (timeS: number, wave: Midline, smooth: Midline) => void = () => {},
): Midline {
  const wave = newMidline("wave");
  const smooth = newMidline("smooth");
  const bodies = new Map<number, ExactWave>();
  for (let sweep = 0; sweep * STEP_S < seconds; sweep++) {
    const timeS = sweep * STEP_S;
    const { amplitude = 1, periodicShare, trust = NONE_LOST } = at(timeS);
    const body = bodies.get(amplitude) ?? new ExactWave("anguilliform", STATIONS, POINTS, amplitude);
    bodies.set(amplitude, body);
    body.moveTo(TURN * timeS);
    wave.step(body.orientations, trust, STEP_S, { phase: TURN * timeS, periodicShare });
    smooth.step(body.orientations, trust);
    observe(timeS, wave, smooth);
  }
  return wave;
}

/** RMS distance of the points of two midlines, as a share of the length. */
function apart(a: Float64Array, b: Float64Array): number {
  return Math.hypot(...a.map((v, i) => v - b[i])) / Math.sqrt(POINTS);
}

const newMidline = (interpolation: "smooth" | "wave") =>
  new Midline({ lengthM: 1, stations: STATIONS, pointCount: POINTS, interpolation });

test("beating starts and stops: the wave glides in and out, without a jump in any sweep, and says what is in use", () => {
  // The share comes and goes at once, the worst case.
  const said = new Map<string, number>();
  let before = new Float64Array(3 * POINTS);
  let largest = 0;
  let largestSteady = 0;
  const midline = swim(
    12,
    (timeS) => ({ periodicShare: timeS >= 2 && timeS < 8 ? 1 : 0 }),
    (timeS, wave, smooth) => {
      const word = wave.whySmooth ?? wave.inUse;
      if (!said.has(word)) said.set(word, timeS);
      const added = wave.positions.map((v, i) => v - smooth.positions[i]);
      const jump = apart(added, before);
      before = added;
      if (timeS > 6 && timeS < 8) largestSteady = Math.max(largestSteady, jump);
      else largest = Math.max(largest, jump);
    },
  );
  // What the wave adds swings with the beat anyway, by up to 1 % of the length: over 50 sweeps it glides in by 0.02 % a
  // sweep, and a bit more, since after a beat and a half it is not yet learned to the last.
  expect(largest).toBeLessThan(largestSteady + 3e-4);
  expect(largestSteady).toBeLessThan(1e-3);
  expect([...said.keys()]).toEqual(["not beating", "learning the wave", "wave"]);
  expect(said.get("wave")).toBeLessThan(4.5);
  expect(midline.inUse).toBe("smooth");
  expect(midline.whySmooth).toBe("not beating");
});

test("without a beat the wave is the smooth midline, to the last digit", () => {
  swim(
    3,
    () => ({ periodicShare: 0.3 }),
    (_, wave, smooth) => expect(wave.positions).toEqual(smooth.positions),
  );
});

test("a change of amplitude is learned within a few beats", () => {
  const changed = swim(14, (timeS) => ({ amplitude: timeS < 6 ? 0.4 : 1, periodicShare: 1 }));
  const steady = swim(14, () => ({ periodicShare: 1 }));
  // Two beats of memory leave 3 % after the seven beats that the oldest of the table has seen, of what the wave adds: 0.5 %.
  expect(apart(changed.positions, steady.positions)).toBeLessThan(1.6e-4);
});

test("a lost sensor drops out and the wave goes on without it; back again, its wave is learned before it counts", () => {
  const lost = Uint8Array.from(STATIONS, (_, i) => (i === 3 ? TRUST.LOST : TRUST.GOOD));
  const truth = new ExactWave("anguilliform", STATIONS, POINTS);
  const words = new Map<number, string>();
  let squares = 0;
  swim(
    14,
    (timeS) => ({ periodicShare: 1, trust: timeS >= 6 && timeS < 9 ? lost : NONE_LOST }),
    (timeS, midline) => {
      words.set(Math.round(timeS * 100), midline.whySmooth ?? midline.inUse);
      if (timeS < 6 || timeS >= 9) return;
      truth.moveTo(TURN * timeS);
      truth.showTruth();
      for (let k = 0; k < POINTS; k++)
        squares +=
          (midline.positions[3 * k] - truth.truth[2 * k]) ** 2 +
          (midline.positions[3 * k + 1] - truth.truth[2 * k + 1]) ** 2;
    },
  );
  expect(words.get(590)).toBe("wave");
  expect(words.get(750)).toBe("wave");
  // One gap is 0.36 of the body, over half the wavelength of 0.64; the other gaps tell the wavelength.
  expect(100 * Math.sqrt(squares / 300 / POINTS)).toBeLessThan(0.1);
  expect(words.get(980)).toBe("learning the wave");
  expect(words.get(1390)).toBe("wave");
});

test("one sensor, or a beat that nobody tells, make no wave", () => {
  const one = new Midline({ lengthM: 1, stations: [0.4], pointCount: POINTS, interpolation: "wave" });
  const q = Float64Array.of(1, 0, 0, 0);
  for (let sweep = 0; sweep < 500; sweep++)
    one.step(q, new Uint8Array(1), STEP_S, { phase: TURN * STEP_S * sweep, periodicShare: 1 });
  expect(one.positions[120]).toBeCloseTo(-1, 12);
  expect(one.inUse).toBe("smooth");
  const untold = newMidline("wave");
  const body = new ExactWave("carangiform", STATIONS, POINTS);
  body.moveTo(1);
  untold.step(body.orientations, NONE_LOST);
  expect(untold.whySmooth).toBe("not beating");
});
