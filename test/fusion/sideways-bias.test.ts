import { describe, expect, it } from "vitest";
import { Window } from "../../bridge/fusion/gap-window.ts";
import { SidewaysBias } from "../../bridge/fusion/sideways-bias.ts";

/** Ten seconds of a gap: excitation, and the swings before and behind, a share of them in step with it. */
function windowOf(biasBefore: number, biasBehind: number, angle: number): Float64Array {
  const s = new Float64Array(Window.SIZE);
  const stepS = 0.01;
  for (let n = 0; n < 1000; n++) {
    const phase = 2 * Math.PI * n * stepS;
    const h = 0.5 * Math.sin(phase);
    const i = 0.1 * Math.sin(phase) + 0.3 * Math.cos(phase);
    const j = -0.1 * Math.sin(phase) + 0.4 * Math.cos(phase) + 0.2 * Math.cos(2 * phase);
    const p = angle * h + biasBehind * j - biasBefore * i;
    const products = {
      HH: h * h,
      HP: h * p,
      PP: p * p,
      HI: h * i,
      HJ: h * j,
      PI: p * i,
      PJ: p * j,
      II: i * i,
      IJ: i * j,
      JJ: j * j,
    };
    for (const [name, product] of Object.entries(products))
      s[Window[name as keyof typeof Window]]! += stepS * product;
    s[Window.TIME]! += stepS;
  }
  s[Window.BEATS] = 10;
  return s;
}

const TRUE_BIASES = [0.1, -0.15, 0.05, 0.12];
const ANGLES = [0, 0.02, -0.05, 0.03];

function found(ahead: readonly number[]): SidewaysBias {
  const bias = new SidewaysBias(ahead.length);
  ahead.forEach((i, j) => {
    if (i >= 0)
      bias.observe(windowOf(TRUE_BIASES[i]!, TRUE_BIASES[j]!, ANGLES[j]!), j, Int32Array.from(ahead));
  });
  return bias;
}

describe("sideways biases of the accelerometers", () => {
  it.each([
    { what: "a chain", ahead: [-1, 0, 1, 2] },
    { what: "a tree, while one sensor is out of the line", ahead: [-1, 0, 0, 1] },
    { what: "a chain with a lost sensor", ahead: [-1, 0, -1, 1] },
  ])("are found in $what, and so are the angles that they spoil", ({ ahead }) => {
    const bias = found(ahead);
    const share = { angle: 0, variance: 0 };
    ahead.forEach((i, j) => {
      if (i < 0) return;
      const s = windowOf(TRUE_BIASES[i]!, TRUE_BIASES[j]!, ANGLES[j]!);
      bias.shareOf(s, i, j, share);
      const angle = s[Window.HP]! / s[Window.HH]! - share.angle;
      // Without noise what is left of a bias is what its prior of 0.1 m/s² draws towards zero.
      expect(Math.abs(bias.biases[j]! - TRUE_BIASES[j]!)).toBeLessThan(0.02);
      // Uncorrected it would be off by up to 0.05 rad.
      expect(Math.abs(angle - ANGLES[j]!)).toBeLessThan(5e-3);
      expect(Math.abs(angle - ANGLES[j]!)).toBeLessThan(2 * Math.sqrt(share.variance));
    });
  });

  it("stay unknown, zero give or take 10 mg, where nothing hangs together", () => {
    const bias = found([-1, 0, -1, 1]);
    expect(bias.biases[2]).toBe(0);
    const s = windowOf(0, 0, 0);
    const share = { angle: 0, variance: 0 };
    bias.shareOf(s, 2, 2, share);
    const toI = s[Window.HI]! / s[Window.HH]!;
    const toJ = s[Window.HJ]! / s[Window.HH]!;
    expect(share.variance).toBeCloseTo(0.1 ** 2 * (toI * toI + toJ * toJ), 9);
  });

  it("are forgotten with the gap that told of them", () => {
    const ahead = Int32Array.from([-1, 0]);
    const bias = new SidewaysBias(2);
    bias.observe(windowOf(0.1, -0.1, 0), 1, ahead);
    expect(bias.biases[0]).toBeGreaterThan(0.05);
    bias.forget(1);
    bias.observe(windowOf(0, 0, 0), 1, ahead);
    expect(Math.abs(bias.biases[0]!)).toBeLessThan(1e-9);
  });
});
