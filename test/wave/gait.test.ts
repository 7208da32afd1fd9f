import { describe, expect, test } from "vitest";
import { RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { TRUST } from "../../bridge/sweep.ts";
import { DOUBT, GAIT_NUMBERS } from "../../bridge/wire/gait.ts";
import { carangiform, LENGTH_M, lastCycle, noise, STATIONS, travelling, watch } from "./waves.ts";

const WAVELENGTH = 0.95;

function share(value: number, of: number): number {
  return Math.abs(value / of - 1);
}

describe("a wave that is known in every number", () => {
  test.each([1, 1.37, 2, 3.1, 5])("%d beats a second at 100 sweeps a second", (frequencyHz) => {
    const { numbers, doubts, envelopeM } = lastCycle(travelling(frequencyHz, WAVELENGTH));
    // The crossing is interpolated on a straight line: at 20 sweeps a beat that is off by up to 0.05 % of a beat, and with
    // the beat's length the fit; everything else is exact.
    expect(share(numbers.frequencyHz, frequencyHz)).toBeLessThan(0.001);
    expect(share(numbers.tailAmplitudeM, 0.2 * LENGTH_M)).toBeLessThan(0.002);
    expect(share(numbers.headAmplitudeM, 0.04 * LENGTH_M)).toBeLessThan(0.002);
    expect(Math.abs(numbers.phaseLag - (2 * Math.PI) / WAVELENGTH)).toBeLessThan(0.2 * RAD_PER_DEG);
    expect(share(numbers.wavelengthM, WAVELENGTH * LENGTH_M)).toBeLessThan(0.001);
    expect(share(numbers.waveSpeedMPerS, frequencyHz * WAVELENGTH * LENGTH_M)).toBeLessThan(0.002);
    expect(share(numbers.strouhal, (frequencyHz * 0.2 * LENGTH_M) / 0.5)).toBeLessThan(0.003);
    expect(share(numbers.slip, 0.5 / (frequencyHz * WAVELENGTH * LENGTH_M))).toBeLessThan(0.002);
    expect(numbers.reynolds).toBeCloseTo((0.5 * LENGTH_M) / 1e-6, 6);
    envelopeM.forEach((half, point) => {
      expect(share(half, LENGTH_M * carangiform(point / 40))).toBeLessThan(0.002);
    });
    for (const name of GAIT_NUMBERS) expect(doubts[name]).toBe(0);
  });

  test("a second harmonic at the tail counts in the amplitude and leaves the wave alone", () => {
    const wave = travelling(2, WAVELENGTH);
    const { numbers } = lastCycle((x, t) => wave(x, t) + 0.01 * x * x * Math.sin(8 * Math.PI * t));
    const tail = Array.from({ length: 10_000 }, (_, i) => {
      const t = i / 20_000;
      return wave(1, t) + 0.01 * Math.sin(8 * Math.PI * t);
    });
    // A parabola through places a ninth of the finest harmonic's period apart.
    expect(share(numbers.tailAmplitudeM, Math.max(...tail) - Math.min(...tail))).toBeLessThan(0.005);
    expect(share(numbers.wavelengthM, WAVELENGTH * LENGTH_M)).toBeLessThan(0.002);
  });

  test("a wave that runs forwards has a negative wavelength, speed and lag", () => {
    const { numbers } = lastCycle(travelling(2, -WAVELENGTH));
    expect(share(numbers.wavelengthM, -WAVELENGTH * LENGTH_M)).toBeLessThan(0.001);
    expect(numbers.phaseLag).toBeLessThan(0);
    expect(numbers.slip).toBeLessThan(0);
  });

  test("a body bent to the left under the wave has that mean bend, and the same wave", () => {
    const bend = 20 * RAD_PER_DEG;
    const wave = travelling(2, WAVELENGTH, (x) => 0.02 * x);
    // A parabola whose slope falls from half the bend's tangent at the nose to minus that at the tail.
    const arc = (x: number) => LENGTH_M * Math.tan(bend / 2) * (x - 0.5) ** 2;
    const { numbers } = lastCycle((x, t) => wave(x, t) + arc(x));
    // The first and last fortieth of the body see 39/40 of the bend; the wave's slope of 8 deg takes another percent.
    expect(share(numbers.meanBend, bend)).toBeLessThan(0.04);
    expect(share(numbers.wavelengthM, WAVELENGTH * LENGTH_M)).toBeLessThan(0.001);
  });
});

describe("noise and lost sweeps", () => {
  test("noise of 1 mm on every point of a 640 mm body leaves the numbers what they are", () => {
    const next = noise();
    const wave = travelling(1.5, WAVELENGTH);
    const { cycles } = watch((x, t) => wave(x, t) + 0.001 * next(), { seconds: 60 });
    expect(cycles.length).toBeGreaterThan(85);
    for (const { numbers } of cycles.slice(5)) {
      // 1 mm either way is 0.58 mm RMS: 2 % of a half amplitude of 64 mm at its two crossings is 1.3 ms RMS of 667 ms.
      expect(share(numbers.frequencyHz, 1.5)).toBeLessThan(0.012);
      expect(share(numbers.tailAmplitudeM, 0.2 * LENGTH_M)).toBeLessThan(0.01);
      expect(share(numbers.waveSpeedMPerS, 1.5 * WAVELENGTH * LENGTH_M)).toBeLessThan(0.03);
      // The nose swings by 13 mm either way: 0.58 mm over sixty-seven sweeps turn its phase by 0.4 deg RMS.
      expect(Math.abs(numbers.phaseLag - (2 * Math.PI) / WAVELENGTH)).toBeLessThan(3 * RAD_PER_DEG);
    }
    const mean = cycles.slice(5).reduce((sum, { numbers }) => sum + numbers.frequencyHz, 0);
    expect(share(mean / (cycles.length - 5), 1.5)).toBeLessThan(0.0005);
  });

  test.each([1, 3, 5])(
    "one sweep in ten lost, singly and in runs of three, at %d beats a second",
    (frequencyHz) => {
      const next = noise();
      let run = 0;
      const lost = () => {
        if (run > 0) run--;
        else if (next() > 0.9) run = next() > 0.5 ? 3 : 1;
        return run > 0;
      };
      const { cycles } = watch(travelling(frequencyHz, WAVELENGTH), { seconds: 30, lost });
      for (const { numbers, doubts } of cycles.slice(5)) {
        if (doubts.tailAmplitudeM !== 0) continue;
        // A crossing in a hole of four steps at 5 Hz, a fifth of a beat, is interpolated to 1 % of the beat.
        expect(share(numbers.frequencyHz, frequencyHz)).toBeLessThan(0.02);
        expect(share(numbers.tailAmplitudeM, 0.2 * LENGTH_M)).toBeLessThan(0.02);
        expect(share(numbers.wavelengthM, WAVELENGTH * LENGTH_M)).toBeLessThan(0.02);
      }
      const good = cycles.filter(({ doubts }) => doubts.tailAmplitudeM === 0);
      expect(good.length).toBeGreaterThan(0.5 * cycles.length);
    },
  );
});

describe("what is not to be trusted says why", () => {
  const wave = travelling(2, WAVELENGTH);

  test("too few sweeps in a cycle", () => {
    const { numbers, doubts } = lastCycle(travelling(5, WAVELENGTH), { rateHz: 25 });
    expect(doubts.tailAmplitudeM & DOUBT.TOO_FEW_SWEEPS).not.toBe(0);
    expect(numbers.frequencyHz).toBeGreaterThan(4);
  });

  test("a hole of more than a third of the cycle", () => {
    const { cycles } = watch(wave, { lost: (sweep) => sweep > 815 && sweep < 833 });
    const holed = cycles.filter(({ doubts }) => (doubts.wavelengthM & DOUBT.TOO_FEW_SWEEPS) !== 0);
    expect(holed).toHaveLength(1);
    expect(holed[0]!.startS).toBeLessThan(8.15);
    expect(holed[0]!.endS).toBeGreaterThan(8.33);
  });

  test("a nose held still: no head amplitude and no phase lag to speak of, the rest stands", () => {
    const { numbers, doubts } = lastCycle(travelling(2, WAVELENGTH, (x) => 0.1 * x * x));
    expect(doubts.headAmplitudeM).toBe(DOUBT.BELOW_NOISE);
    expect(doubts.phaseLag).toBe(DOUBT.BELOW_NOISE);
    expect(doubts.waveSpeedMPerS).toBe(0);
    // Read from the foremost point that swings.
    expect(Math.abs(numbers.phaseLag - (2 * Math.PI) / WAVELENGTH)).toBeLessThan(0.2 * RAD_PER_DEG);
  });

  test("a standing wave has no speed worth telling", () => {
    const { doubts } = lastCycle((x, t) => 0.064 * Math.cos(1.6 * Math.PI * x) * Math.sin(4 * Math.PI * t));
    expect(doubts.waveSpeedMPerS & DOUBT.STANDING_WAVE).not.toBe(0);
    expect(doubts.slip & DOUBT.STANDING_WAVE).not.toBe(0);
    expect(doubts.tailAmplitudeM).toBe(0);
  });

  test("more than half a wavelength between two sensors", () => {
    const short = travelling(2, 0.5);
    expect(lastCycle(short, { stations: [0.05, 0.5, 0.95] }).doubts.waveSpeedMPerS).toBe(
      DOUBT.SENSORS_SPARSE,
    );
    expect(lastCycle(short).doubts.waveSpeedMPerS).toBe(0);
  });

  test.each([
    { trust: TRUST.LOST, doubt: DOUBT.SENSOR_LOST },
    { trust: TRUST.BRIDGED, doubt: DOUBT.BRIDGED },
    { trust: TRUST.CLIPPED, doubt: DOUBT.CLIPPED },
    { trust: TRUST.SETTLING, doubt: DOUBT.SETTLING },
  ])("trust $trust of one sensor for a while spoils the cycles of that while", ({ trust, doubt }) => {
    const { cycles } = watch(wave, {
      trust: (t) => STATIONS.map((_, i) => (i === 3 && t > 8 && t < 9.5 ? trust : TRUST.GOOD)),
    });
    for (const { startS, endS, doubts } of cycles) {
      if (startS > 8 && endS < 9.5) expect(doubts.waveSpeedMPerS).toBe(doubt);
      if (endS < 8 || startS > 9.5) expect(doubts.waveSpeedMPerS).toBe(0);
    }
  });

  test("one bridged sweep in a cycle spoils nothing, one sweep of a lost sensor does", () => {
    const once = (trust: number) => (t: number) =>
      STATIONS.map((_, i) => (i === 3 && Math.abs(t - 8.03) < 0.001 ? trust : TRUST.GOOD));
    const spoiled = (trust: number) =>
      watch(wave, { trust: once(trust) }).cycles.filter(({ doubts }) => doubts.waveSpeedMPerS !== 0);
    expect(spoiled(TRUST.BRIDGED)).toHaveLength(0);
    expect(spoiled(TRUST.LOST)).toHaveLength(1);
  });

  test("headings that nothing holds spoil the mean bend alone", () => {
    const { doubts } = lastCycle(wave, { trust: () => STATIONS.map(() => TRUST.HEADING_UNAIDED) });
    expect(GAIT_NUMBERS.filter((name) => doubts[name] !== 0)).toEqual(["meanBend"]);
  });

  test("flow speed or water temperature not given", () => {
    const still = lastCycle(wave, { flowMPerS: 0 });
    for (const name of ["strouhal", "slip", "reynolds"] as const) {
      expect(still.numbers[name]).toBeNaN();
      expect(still.doubts[name]).toBe(DOUBT.NO_FLOW_SPEED);
    }
    const { numbers, doubts } = lastCycle(wave, { viscosityM2PerS: Number.NaN });
    expect(numbers.reynolds).toBeNaN();
    expect(doubts.reynolds).toBe(DOUBT.NO_WATER_TEMPERATURE);
    expect(doubts.strouhal).toBe(0);
  });
});

describe("from cycle to cycle", () => {
  test("the spread is that of the last cycles, doubted ones left out", () => {
    const { cycles } = watch((x, t) => travelling(2, WAVELENGTH)(x, t) * (1 + 0.05 * Math.sin(3 * t)), {
      trust: (t) => STATIONS.map(() => (t > 10 && t < 11 ? TRUST.LOST : TRUST.GOOD)),
    });
    const last = cycles
      .filter(({ endS }) => endS < 12.1)
      .slice(-10)
      .filter(({ doubts }) => doubts.tailAmplitudeM === 0)
      .map(({ numbers }) => numbers.tailAmplitudeM);
    expect(last.length).toBeLessThan(9);
    const mean = last.reduce((sum, a) => sum + a) / last.length;
    const variance = last.reduce((sum, a) => sum + (a - mean) ** 2, 0) / (last.length - 1);
    const at = cycles.filter(({ endS }) => endS < 12.1).at(-1)!;
    expect(at.spread.tailAmplitudeM).toBeCloseTo(Math.sqrt(variance), 12);
  });

  test("a pause ends a steady bout and begins the spread anew", () => {
    const wave = travelling(2, WAVELENGTH);
    const { cycles, bouts } = watch((x, t) => (t > 9 && t < 12 ? 0 : wave(x, t)));
    expect(bouts).toHaveLength(2);
    expect(bouts[0]!.endS).toBeLessThan(9.1);
    expect(bouts[1]!.startS).toBeGreaterThan(11.9);
    expect(bouts[0]!.numbers.frequencyHz.mean).toBeCloseTo(2, 2);
    expect(cycles.find(({ startS }) => startS > 11)!.spread.frequencyHz).toBeNaN();
  });
});
