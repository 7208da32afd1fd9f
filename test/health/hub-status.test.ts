import { expect, test } from "vitest";
import { HealthBench } from "../support/health-bench.ts";

const GOOD = { supplyV: 5.05, temperatureC: 21, faults: 0 };

function told(...reports: Partial<typeof GOOD>[]) {
  const bench = new HealthBench();
  reports.forEach((report, k) => {
    bench.health.hubStatus(k / 2, { ...GOOD, ...report });
  });
  return bench;
}

test("a low supply is a flag at once, an alarm when it is very low, and ends well above the limit", () => {
  const bench = told({}, { supplyV: 4.7 });
  expect(bench.flags).toMatchObject([
    { kind: "supply low", sensor: -1, severity: "caution", startS: 0.5, detail: "supply 4.70 V" },
  ]);
  expect(told({ supplyV: 4.4 }).flags).toMatchObject([{ severity: "alarm" }]);
  const band = { supplyV: 4.77 };
  expect(told({ supplyV: 4.7 }, band, band, band, band).openNow).toEqual(["supply low@-1"]);
  expect(told({ supplyV: 4.7 }, {}, {}, {}).openNow).toEqual([]);
});

test("a hub that says its supply is low is believed, with and without a number", () => {
  expect(told({ faults: 1 }).raised).toEqual(["supply low@-1"]);
  expect(told({ supplyV: Number.NaN, faults: 1 }).flags).toMatchObject([{ detail: "the hub says so" }]);
});

test("too cold and too hot", () => {
  expect(told({ temperatureC: -3 }).flags).toMatchObject([
    { kind: "hub temperature", detail: "hub at -3 °C" },
  ]);
  expect(told({ temperatureC: 60 }).raised).toEqual(["hub temperature@-1"]);
});

test("fault bits are named, unknown ones numbered", () => {
  expect(told({ faults: 2 }).flags).toMatchObject([
    { kind: "hub fault", severity: "alarm", detail: "the bus to the sensors fails" },
  ]);
  expect(told({ faults: 4 + 8 + 64 }).flags).toMatchObject([
    { severity: "caution", detail: "its buffer overran; its watchdog restarted it; fault bits 64" },
  ]);
});

test("numbers that the layout has not are not judged", () => {
  expect(told({ supplyV: Number.NaN, temperatureC: Number.NaN }).raised).toEqual([]);
});
