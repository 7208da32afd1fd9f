/** Flags on the page: glyph, word, what was measured, what to do; they go when they end. */
import type { Page } from "playwright-core";
import { expect, onTestFinished, test } from "vitest";
import { FakeBridge } from "../support/fake-bridge.ts";
import { flagOn, type Scene, sixAxisScene, troubledScene } from "../support/scene.ts";
import { pictureOf, textOf, untilDrawn } from "./page.ts";
import { useBrowser } from "./use-browser.ts";

const open = useBrowser();

async function startBridge(change: Partial<Scene> = {}): Promise<FakeBridge> {
  const bridge = await FakeBridge.start(change);
  onTestFinished(() => bridge.stop());
  return bridge;
}

function magnetAt(bridge: FakeBridge, sensor: number) {
  return flagOn(sensor, bridge.scene.sensors, {
    id: 1,
    kind: "magnetic interference",
    severity: "caution",
    detail: "field 31 % off",
    startS: bridge.hubTimeS,
  });
}

test("a flag appears with its severity as glyph and word, its sensor, what was measured, and what to do", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  const flag = magnetAt(bridge, 3);
  bridge.show({ open: [flag] });
  const item = page.locator("#flags li[data-kind='magnetic interference']");
  await item.waitFor();
  const text = await textOf(page, "#flags li");
  for (const part of ["S4", "magnetic interference", "caution", "field 31 % off", flag.advice]) {
    expect(text).toContain(part);
  }
  expect(await item.getAttribute("data-severity")).toBe("caution");
  const glyph = await item.locator("[class~=glyph]").boundingBox();
  expect(glyph!.width).toBeGreaterThan(6);
  expect(glyph!.height).toBeGreaterThan(6);
});

test("the three severities differ in shape, not in colour alone", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  const severities = ["notice", "caution", "alarm"] as const;
  const flags = severities.map((severity, i) => ({ ...magnetAt(bridge, i), id: i + 1, severity }));
  bridge.show({ open: flags });
  await page.locator("#flags li").nth(2).waitFor();
  const shapes = await page
    .locator("#flags li [class~=glyph] svg")
    .evaluateAll((glyphs) => glyphs.map((glyph) => glyph.innerHTML));
  expect(new Set(shapes).size).toBe(3);
});

test("the flagged sensor's own column shows it too", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  bridge.show({ open: [magnetAt(bridge, 3)] });
  await page.locator("[data-sensor='3'] [data-severity='caution'] svg").first().waitFor();
  expect(await page.locator("#sensors [data-sensor]:not([data-sensor='3']) [data-severity]").count()).toBe(0);
});

test("an ended flag leaves the open ones and is told among the past ones; then all is said to be well", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  const calm = await textOf(page, "#flags p");
  expect(calm).not.toBe("");
  const flag = magnetAt(bridge, 3);
  bridge.show({ open: [flag] });
  await page.locator("#flags li").waitFor();
  expect(await textOf(page, "#flags")).not.toContain(calm);
  bridge.show({ open: [], ended: [{ ...flag, endS: bridge.hubTimeS }] });
  await page.locator("#flags li").waitFor({ state: "detached" });
  await page.locator("#ended li").waitFor();
  expect(await textOf(page, "#ended li")).toContain("S4 magnetic interference");
  expect(await textOf(page, "#flags")).toContain(calm);
});

test("while flagged, what was measured is kept up to date in place", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  const flag = magnetAt(bridge, 3);
  bridge.show({ open: [flag] });
  const item = await page.locator("#flags li").elementHandle();
  bridge.show({ open: [{ ...flag, detail: "field 58 % off", severity: "alarm" }] });
  await page.locator("#flags li[data-severity='alarm']").waitFor();
  expect(await textOf(page, "#flags li")).toContain("field 58 % off");
  // The same element: a reader's place and the focus are not lost.
  expect(await item!.evaluate((element) => element.isConnected)).toBe(true);
});

test("an alarm is spoken once to a screen reader; a caution is not", async () => {
  const { sensors, open: flags } = troubledScene();
  const bridge = await startBridge({ sensors });
  const page = await open(bridge.address);
  const region = page.locator("#alarm");
  expect((await region.getAttribute("role")) ?? (await region.getAttribute("aria-live"))).toMatch(
    /alert|assertive/,
  );
  const [alarm, caution] = flags;
  bridge.show({ open: [caution!] });
  await page.locator("#flags li[data-severity='caution']").waitFor();
  expect(await textOf(page, "#alarm")).toBe("");
  bridge.show({ open: [alarm!, caution!] });
  await page.waitForFunction(() => document.getElementById("alarm")?.textContent !== "");
  expect(await textOf(page, "#alarm")).toContain(alarm!.advice);
  // From here on every rewriting of the region would be spoken.
  await page.evaluate(() => {
    window.before = 0;
    new MutationObserver(() => {
      window.before = Number(window.before) + 1;
    }).observe(document.getElementById("alarm")!, { childList: true, characterData: true, subtree: true });
  });
  bridge.show({ open: [{ ...alarm!, detail: "26 % of the last second" }, caution!] });
  await page.locator("#flags li", { hasText: "26 %" }).waitFor();
  expect(await page.evaluate(() => window.before)).toBe(0);
});

test("a flag of the whole rig names no sensor; text from the bridge is text, never markup", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  const flag = flagOn(-1, bridge.scene.sensors, {
    id: 1,
    kind: "link silent",
    severity: "alarm",
    detail: "<img src=x onerror=alert(1)> nothing for 1.2 s",
    startS: bridge.hubTimeS,
  });
  bridge.show({ open: [flag], marks: [{ timeS: 1, text: "<b>bold</b>", from: "operator" }] });
  await page.locator("#flags li").waitFor();
  const text = await textOf(page, "#flags li");
  expect(text).toMatch(/link silent/i);
  expect(text).not.toMatch(/S\d/);
  expect(text).toContain("<img");
  expect(await textOf(page, "#marks")).toContain("<b>bold</b>");
  expect(await page.locator("#flags img, #marks b").count()).toBe(0);
});

test("headings held by the body are said to be so, and no more once a magnetometer holds them", async () => {
  const bridge = await startBridge({ heading: "relative" });
  const page = await open(bridge.address);
  await page.getByText("Heading: held by the body").waitFor();
  bridge.show({ heading: "magnetic" });
  await page.getByText("Heading: held by the body").waitFor({ state: "detached" });
});

test("a rig whose heading runs free says so, and a sensor without magnetometer shows no field", async () => {
  const bridge = await startBridge(sixAxisScene());
  const page = await open(bridge.address);
  await page.waitForFunction(() => /drift/i.test(document.body.textContent ?? ""));
  const column = page.locator("[data-sensor='0']");
  await column.filter({ hasText: "no mag" }).waitFor();
  expect(await column.textContent()).not.toContain("NaN");
});

/** How red the lanes' canvas is at a place, in steps of a colour channel. */
async function redness(page: Page, x: number, y: number): Promise<number> {
  const { data, width, channels } = await pictureOf(page);
  const at = (Math.round(y) * width + Math.round(x)) * channels;
  return data[at]! - data[at + 2]!;
}

test.each([
  // S6 stands at 97 % of the ruler, the outline 9 pixels to either side; the whole rig's right of the tail.
  [5, "at its sensor", (ruler: number) => 176 + 0.97 * ruler - 9],
  [-1, "at the lane's edge, for the whole rig", (ruler: number) => 176 + ruler + 5],
] as const)(
  "what an alarm on sensor %i covers is outlined in the body wave, %s, from its onset on",
  async (sensor, _, place) => {
    const bridge = await startBridge({ wave: { frequencyHz: 0, waves: -0.25, tailShare: 0.15 } });
    const page = await open(bridge.address);
    const request = { id: 1, kind: "gyro saturation", severity: "alarm", detail: "clipped on z" } as const;
    const startS = bridge.hubTimeS - 1;
    bridge.show({ open: [flagOn(sensor, bridge.scene.sensors, { ...request, startS })] });
    await page.locator("#flags li").waitFor();
    await untilDrawn(page, 2);
    const lanes = (await page.locator("#lanes").boundingBox())!;
    const wave = (await page.locator("#lane-wave").boundingBox())!;
    const x = place(lanes.width - 176 - 28);
    const y = (ageS: number) => wave.y - lanes.y + 10 + (ageS / 3) * (wave.height - 20);
    expect(await redness(page, x, y(0.5))).toBeGreaterThan(100);
    expect(await redness(page, x, y(2.8))).toBeLessThan(50);
  },
);
