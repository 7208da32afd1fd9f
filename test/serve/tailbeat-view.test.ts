import { expect, test } from "vitest";
import { tailbeatView } from "../../bridge/serve/tailbeat-view.ts";
import { LENGTH_M, travelling, watch } from "../wave/waves.ts";

const wave = travelling(2, 0.95);

test("while the body beats, every number comes with its scatter and doubts", () => {
  const view = tailbeatView(watch(wave, { flowMPerS: Number.NaN }).meter);
  expect(view.numbers.frequencyHz.value).toBeCloseTo(2, 2);
  expect(view.numbers.tailAmplitudeM.value).toBeCloseTo(0.2 * LENGTH_M, 4);
  expect(view.numbers.tailAmplitudeM.spread).toBeLessThan(1e-4);
  expect(view.numbers.strouhal).toEqual({ value: null, spread: null, doubts: ["no flow speed"] });
  expect(JSON.parse(JSON.stringify(view))).toEqual(view);
});

test("once it has stopped, no number and no doubt is left of the last beat", () => {
  const view = tailbeatView(watch((x, t) => (t < 10 ? wave(x, t) : 0)).meter);
  for (const one of Object.values(view.numbers))
    expect(one).toEqual({ value: null, spread: null, doubts: [] });
  expect(view).toMatchObject({ steadyCycles: 0, steady: false });
});
