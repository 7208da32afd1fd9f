/** Nothing overlaps, nothing is cut off, nothing scrolls sideways: at every size, with few sensors and with many. */
import type { Page } from "playwright-core";
import { expect, onTestFinished, test } from "vitest";
import { FakeBridge } from "../support/fake-bridge.ts";
import { drivenScene, longNamesScene, type Scene, troubledScene } from "../support/scene.ts";
import { untilDrawn } from "./page.ts";
import { useBrowser } from "./use-browser.ts";

const open = useBrowser();

const SIZES = [
  [1440, 900],
  [1280, 720],
  [1024, 768],
  [1920, 1080],
  [3840, 2160],
] as const;

interface TextBox {
  /** Counts pieces of text: one that is wrapped or cut has several boxes. */
  readonly piece: number;
  readonly text: string;
  readonly left: number;
  readonly top: number;
  readonly right: number;
  readonly bottom: number;
}

async function openScene(scene: Partial<Scene>, size: readonly [number, number]): Promise<Page> {
  const bridge = await FakeBridge.start(scene);
  onTestFinished(() => bridge.stop());
  const page = await open(bridge.address, { size });
  await untilDrawn(page, 5);
  return page;
}

/** Where each piece of visible text stands, without those meant for screen readers alone; clipped parts left out. */
function visibleText(page: Page, within: string): Promise<TextBox[]> {
  return page.evaluate((selector) => {
    const boxes: TextBox[] = [];
    let piece = 0;
    const walker = document.createTreeWalker(document.querySelector(selector)!, NodeFilter.SHOW_TEXT);
    for (let node = walker.nextNode(); node !== null; node = walker.nextNode()) {
      const parent = node.parentElement!;
      if (node.textContent!.trim() === "" || parent.closest(".unseen") !== null) continue;
      if (!parent.checkVisibility({ visibilityProperty: true, opacityProperty: true })) continue;
      const range = document.createRange();
      range.selectNodeContents(node);
      piece++;
      // Letters lie within an em about the middle of their line, which may be taller.
      const emPx = Number.parseFloat(getComputedStyle(parent).fontSize);
      for (const line of range.getClientRects()) {
        let { left, right } = line;
        let top = (line.top + line.bottom - emPx) / 2;
        let bottom = top + emPx;
        for (let around: Element | null = parent; around !== null; around = around.parentElement) {
          if (getComputedStyle(around).overflow === "visible") continue;
          const clip = around.getBoundingClientRect();
          left = Math.max(left, clip.left);
          top = Math.max(top, clip.top);
          right = Math.min(right, clip.right);
          bottom = Math.min(bottom, clip.bottom);
        }
        if (right > left && bottom > top)
          boxes.push({ piece, text: node.textContent!.trim(), left, top, right, bottom });
      }
    }
    return boxes;
  }, within);
}

/** Pairs that share more than a hair: rounding may make neighbours on a line touch. */
function overlaps(boxes: readonly TextBox[]): string[] {
  const found: string[] = [];
  boxes.forEach((a, i) => {
    for (const b of boxes.slice(i + 1)) {
      const across = Math.min(a.right, b.right) - Math.max(a.left, b.left);
      const down = Math.min(a.bottom, b.bottom) - Math.max(a.top, b.top);
      if (a.piece !== b.piece && across > 1 && down > 1)
        found.push(`${a.text} | ${b.text}: ${across} x ${down}`);
    }
  });
  return found;
}

function outside(boxes: readonly TextBox[], [width]: readonly [number, number]): string[] {
  return boxes.filter(({ left, right }) => left < 0 || right > width).map(({ text }) => text);
}

const SCENES: readonly [string, () => Scene][] = [
  ["6 sensors in trouble", () => troubledScene(6)],
  ["16 sensors", () => troubledScene(16)],
  ["64 sensors", () => troubledScene(64)],
  ["long names", longNamesScene],
  ["beside its drive, in trouble", () => drivenScene(troubledScene(6))],
];

for (const [title, scene] of SCENES) {
  test.each(SIZES)(`${title}: no text runs into another or off the page at %i x %i`, async (...size) => {
    const page = await openScene(scene(), size);
    const text = await visibleText(page, "body");
    expect(text.length).toBeGreaterThan(20);
    expect(overlaps(text)).toEqual([]);
    expect(outside(text, size)).toEqual([]);
    const { scrollWidth, clientWidth } = await page.evaluate(() => document.documentElement);
    expect(scrollWidth).toBe(clientWidth);
  });
}

test.each(SIZES)(
  "with many flags open the panel scrolls, and the page does not, at %i x %i",
  async (...size) => {
    const scene = troubledScene(16);
    const flag = scene.open[0]!;
    const flags = Array.from({ length: 14 }, (_, i) => ({ ...flag, id: i + 1, sensor: i }));
    const page = await openScene({ ...scene, open: flags }, size);
    const text = await visibleText(page, "body");
    expect(overlaps(text)).toEqual([]);
    expect(await page.evaluate(() => document.documentElement.scrollHeight)).toBeLessThanOrEqual(
      Math.max(size[1], 620),
    );
  },
);

test.each(SIZES)(
  "a refused mark and its reason have room beside long names and a long failure, at %i x %i",
  async (...size) => {
    const bridge = await FakeBridge.start(longNamesScene());
    onTestFinished(() => bridge.stop());
    bridge.refusing = "more marks than the bridge takes in a second, and one of them too long";
    const page = await open(bridge.address, { size });
    await page.keyboard.press("m");
    await page.keyboard.type("flow raised");
    await page.keyboard.press("Enter");
    await page.getByText(bridge.refusing).waitFor();
    await untilDrawn(page, 3);
    const text = await visibleText(page, "body");
    expect(overlaps(text)).toEqual([]);
    expect(outside(text, size)).toEqual([]);
    // A line of the field and room for the words: never so much that the lanes would lack it.
    expect((await page.locator("header").boundingBox())!.height).toBeLessThan(150);
    expect((await page.locator("#mark-text").boundingBox())!.width).toBeGreaterThan(100);
  },
);

test.each([6, 16, 64])(
  "the page grows and shrinks with its window, and stays in order, %i sensors",
  async (count) => {
    const page = await openScene(troubledScene(count), [1920, 1080]);
    for (const [width, height] of [
      [1024, 768],
      [1440, 900],
    ] as const) {
      await page.setViewportSize({ width, height });
      await page.waitForFunction(
        () => document.querySelector("canvas")!.clientWidth === document.getElementById("lanes")!.clientWidth,
      );
      await untilDrawn(page, 3);
      const text = await visibleText(page, "body");
      expect(overlaps(text)).toEqual([]);
      expect(outside(text, [width, height])).toEqual([]);
    }
  },
);

test.each([6, 16])("every one of %i sensors is named beneath the ruler at 1440 x 900", async (count) => {
  const page = await openScene(troubledScene(count), [1440, 900]);
  const text = (await visibleText(page, "#sensors")).map((box) => box.text);
  for (let i = 1; i <= count; i++) expect(text).toContain(`S${i}`);
});

test.each([
  [5, true],
  [6, false],
  [16, true],
  [64, false],
] as const)("each of %i sensors has its column beneath its place on the ruler", async (count, hasMag) => {
  const scene = troubledScene(count);
  const sensors = scene.sensors.map((sensor) => ({ ...sensor, hasMag }));
  const page = await openScene({ ...scene, sensors }, [1440, 900]);
  const lefts = await page
    .locator("[data-sensor]")
    .evaluateAll((columns) => columns.map((column) => column.getBoundingClientRect().left));
  expect(lefts).toHaveLength(count);
  const width = (lefts.at(-1)! - lefts[0]!) / (sensors.at(-1)!.station - sensors[0]!.station);
  lefts.forEach((left, i) => {
    // One shared ruler: within a pixel of where the station lies.
    expect(Math.abs(left - (lefts[0]! + (sensors[i]!.station - sensors[0]!.station) * width))).toBeLessThan(
      1,
    );
  });
});

test("what is too narrow for numbers shows them for the sensor that has the focus", async () => {
  const page = await openScene(troubledScene(16), [1440, 900]);
  await page.locator("[data-sensor='7']").focus();
  const text = await visibleText(page, "#sensors");
  expect(text.filter((box) => box.text.endsWith("%")).length).toBeGreaterThanOrEqual(4);
});
