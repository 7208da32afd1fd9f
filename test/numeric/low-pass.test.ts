import { describe, expect, it } from "vitest";
import { lowPassGains, lowPassSize, stepLowPass } from "../../bridge/numeric/low-pass.ts";

/** A filter of one channel, with its input slot behind it. */
function filter(tauS: number) {
  const record = new Float64Array(lowPassSize(1) + 1);
  const inputAt = lowPassSize(1);
  const gains = new Float64Array(6);
  return (input: number, stepS: number) => {
    record[inputAt] = input;
    lowPassGains(gains, 0, tauS, stepS);
    stepLowPass(record, 0, 1, inputAt, gains, 0);
    return record[1]!;
  };
}

/** Step response of the second-order Butterworth low-pass with poles at (-1 ± i)/τ. */
function stepResponse(timeS: number, tauS: number): number {
  const angle = timeS / tauS;
  return 1 - Math.exp(-angle) * (Math.cos(angle) + Math.sin(angle));
}

describe("stepLowPass", () => {
  it("starts at its first input and averages for one time constant", () => {
    const step = filter(1);
    expect(step(5, 0.01)).toBe(5);
    expect(step(7, 0.01)).toBeCloseTo(6, 12);
    expect(step(0, 0.02)).toBeCloseTo(3, 12); // weighted by time
  });

  it("then answers a step as the closed form does, at any step length", () => {
    for (const lengths of [[0.01], [0.003, 0.02, 0.011], [0.5]]) {
      const step = filter(1);
      step(0, 1.5); // the first time constant, at rest at zero
      step(1, 1e-9); // the input jumps
      let timeS = 0;
      for (let i = 0; timeS < 6; i++) {
        const stepS = lengths[i % lengths.length]!;
        timeS += stepS;
        expect(Math.abs(step(1, stepS) - stepResponse(timeS, 1))).toBeLessThan(1e-8); // the jump took 1e-9 s
      }
    }
  });

  it("is 3 dB down at its cut-off of √2 / (2π τ)", () => {
    const tauS = 0.5;
    const step = filter(tauS);
    const omega = Math.SQRT2 / tauS;
    let greatest = 0;
    for (let i = 0; i < 20000; i++) {
      const value = step(Math.sin((omega * i) / 1000), 0.001);
      if (i > 10000) greatest = Math.max(greatest, value);
    }
    expect(Math.abs(greatest - Math.SQRT1_2)).toBeLessThan(1e-4); // sampled peak of a sine, 1000 samples a second
  });

  it("filters channels apart, wherever they lie in the record", () => {
    const at = 3;
    const record = new Float64Array(at + lowPassSize(2) + 2);
    const inputAt = at + lowPassSize(2);
    const gains = new Float64Array(6);
    lowPassGains(gains, 0, 0.1, 0.01);
    for (let i = 0; i < 200; i++) {
      record[inputAt] = 1;
      record[inputAt + 1] = -2;
      stepLowPass(record, at, 2, inputAt, gains, 0);
    }
    expect([...record.subarray(0, at)]).toEqual([0, 0, 0]);
    expect([record[at + 1], record[at + 2]]).toEqual([1, -2]);
  });
});
