/** The lanes show the midline that the stream sent, moving, in both lights and with both renderers. */
import type { Page } from "playwright-core";
import { expect, onTestFinished, test } from "vitest";
import { FakeBridge } from "../support/fake-bridge.ts";
import type { Picture } from "../support/png.ts";
import { type Scene, writeMidline } from "../support/scene.ts";
import { pictureOf, untilDrawn, untilLink } from "./page.ts";
import { useBrowser } from "./use-browser.ts";

const open = useBrowser();

async function startBridge(change: Partial<Scene> = {}): Promise<FakeBridge> {
  const bridge = await FakeBridge.start(change);
  onTestFinished(() => bridge.stop());
  return bridge;
}

/** Hub time and midline of one drawing. */
function newestShape(page: Page) {
  return page.evaluate(() => ({
    hubTimeS: window.bendwatchView.hubTimeS,
    midline: [...window.bendwatchView.midline],
  }));
}

/** Share of pixels that differ by more than rounding from the picture's corner, where there is nothing but ground. */
function drawnShare({ data, channels }: Picture): number {
  let drawn = 0;
  for (let at = 0; at < data.length; at += channels) {
    let difference = 0;
    for (let c = 0; c < 3; c++) difference = Math.max(difference, Math.abs(data[at + c]! - data[c]!));
    if (difference > 8) drawn++;
  }
  return drawn / (data.length / channels);
}

/** Rows of the upper lane in which the column of pixels at `x` is drawn by the ribbon: its brightest or darkest run. */
function ribbonRow({ width, channels, data }: Picture, x: number, height: number): number {
  let sum = 0;
  let weight = 0;
  for (let y = 0; y < height; y++) {
    const at = (y * width + x) * channels;
    let difference = 0;
    for (let c = 0; c < 3; c++) difference += Math.abs(data[at + c]! - data[c]!);
    // Grid, envelope and past positions are faint beside the ribbon.
    if (difference < 200) continue;
    sum += y;
    weight++;
  }
  return sum / weight;
}

test("the midline moves, and is the one that the stream sent for that hub time", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  const first = await newestShape(page);
  await page.waitForFunction((after) => window.bendwatchView.hubTimeS > after + 0.2, first.hubTimeS);
  const second = await newestShape(page);
  for (const { hubTimeS, midline } of [first, second]) {
    const sent = new Float32Array(midline.length);
    writeMidline(bridge.scene.wave, bridge.scene.lengthM, hubTimeS, sent);
    expect(midline).toEqual([...sent]);
  }
  expect(second.midline).not.toEqual(first.midline);
});

test.each([
  ["canvas", "dark"],
  ["canvas", "day"],
  ["webgl", "dark"],
  ["webgl", "day"],
] as const)("the %s renderer draws a picture that changes, %s", async (renderer, light) => {
  const bridge = await startBridge();
  const page = await open(bridge.address, { renderer, light });
  expect(await page.evaluate(() => window.bendwatchView.renderer)).toBe(renderer);
  await untilDrawn(page, 5);
  const before = await pictureOf(page);
  await untilDrawn(page, 5);
  const after = await pictureOf(page);
  // Ribbon, ruler, wave and strip cover a good part of the lanes; a lone frame or grid would not reach 2 %.
  expect(drawnShare(before)).toBeGreaterThan(0.02);
  expect(Buffer.compare(before.data, after.data)).not.toBe(0);
});

test("the ribbon is drawn where the midline is: a body bent left lies above its middle line", async () => {
  // A standing bend: with no beat the picture stays as it is while it is looked at.
  const bridge = await startBridge({ wave: { frequencyHz: 0, waves: -0.25, tailShare: 0.15 } });
  const page = await open(bridge.address);
  await untilDrawn(page, 5);
  const lane = await page.locator("#lane-above").boundingBox();
  const lanes = await page.locator("#lanes").boundingBox();
  const picture = await pictureOf(page);
  const middle = lane!.y - lanes!.y + lane!.height / 2;
  const ruler = { nose: 176, tail: lanes!.width - 28 };
  const at = (station: number) =>
    ribbonRow(
      picture,
      Math.round(ruler.nose + station * (ruler.tail - ruler.nose)),
      Math.round(lane!.height),
    );
  expect(at(0.95)).toBeLessThan(at(0.6) - 5);
  expect(at(0.6)).toBeLessThan(middle);
  expect(Math.abs(at(0.05) - middle)).toBeLessThan(2);
});

test("without a GPU the canvas renderer is chosen", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  expect(await page.evaluate(() => window.bendwatchView.renderer)).toBe("canvas");
});

/** Share of the body wave's lane that is drawn on, from so many to so many seconds ago. */
async function waveDrawn(page: Page, fromS: number, toS: number): Promise<number> {
  const wave = (await page.locator("#lane-wave").boundingBox())!;
  const lanes = (await page.locator("#lanes").boundingBox())!;
  const picture = await pictureOf(page);
  const stride = picture.width * picture.channels;
  // Three seconds fill the lane but for its margins of 10 pixels.
  const row = (s: number) => Math.round(wave.y - lanes.y + 10 + (s / 3) * (wave.height - 20));
  return drawnShare({ ...picture, data: picture.data.subarray(row(fromS) * stride, row(toS) * stride) });
}

test("the body wave shows what was received, and nothing of the time before", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  await untilDrawn(page, 3);
  expect(await waveDrawn(page, 2, 2.9)).toBe(0);
  await page.waitForFunction((start) => window.bendwatchView.hubTimeS > start + 3.2, bridge.scene.startS);
  expect(await waveDrawn(page, 2, 2.9)).toBeGreaterThan(0.2);
});

test("a new run clears the past: the body wave starts again from nothing", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  await page.waitForFunction((start) => window.bendwatchView.hubTimeS > start + 3.2, bridge.scene.startS);
  bridge.startOver();
  await page.waitForFunction(() => window.bendwatchView.hubTimeS < 1 && window.bendwatchView.hubTimeS > 0);
  expect(await waveDrawn(page, 2, 2.9)).toBe(0);
});

test("where nothing was received the body wave shows nothing, not the shape before or after", async () => {
  const bridge = await startBridge({ wave: { frequencyHz: 0, waves: -0.25, tailShare: 0.15 } });
  const page = await open(bridge.address);
  await page.waitForFunction((start) => window.bendwatchView.hubTimeS > start + 1, bridge.scene.startS);
  const gapEndsS = bridge.hubTimeS + 2;
  bridge.skip(2);
  // Late enough for some rows after the gap, however busy the machine.
  await page.waitForFunction((end) => window.bendwatchView.hubTimeS > end + 0.3, gapEndsS);
  // The picture stands still from here on, so many seconds after the gap.
  bridge.show({ link: "silent" });
  await untilDrawn(page, 2);
  const agoS = bridge.hubTimeS - gapEndsS;
  expect(await waveDrawn(page, 0, agoS)).toBeGreaterThan(0.2);
  expect(await waveDrawn(page, agoS + 0.1, Math.min(agoS + 1.7, 3))).toBe(0);
});

test("a page that was hidden draws nothing, and the newest on its return", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  await untilDrawn(page, 3);
  const hide = (hidden: boolean) =>
    page.evaluate((value) => {
      Object.defineProperty(document, "hidden", { configurable: true, get: () => value });
      document.dispatchEvent(new Event("visibilitychange"));
      // What was asked for before has been drawn two display frames later.
      return new Promise<number>((resolve) => {
        requestAnimationFrame(() => requestAnimationFrame(() => resolve(window.bendwatchView.drawn)));
      });
    }, hidden);
  const drawn = await hide(true);
  const sentS = bridge.hubTimeS;
  await expect.poll(() => bridge.hubTimeS).toBeGreaterThan(sentS + 0.5);
  expect(await page.evaluate(() => window.bendwatchView.drawn)).toBe(drawn);
  await hide(false);
  await page.waitForFunction((after) => window.bendwatchView.hubTimeS > after, sentS + 0.5);
});

test("the body wave runs down: newest on top, one colour where the body is to the left, another to the right", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  await page.waitForFunction((start) => window.bendwatchView.hubTimeS > start + 3.2, bridge.scene.startS);
  bridge.show({ link: "silent" });
  await untilLink(page, "silent");
  await untilDrawn(page, 3);
  const { wave: swimming, lengthM } = bridge.scene;
  const tail = (ageS: number) => {
    const midline = new Float32Array(9);
    writeMidline(swimming, lengthM, bridge.hubTimeS - ageS, midline);
    return midline[7]!;
  };
  // Ages at which the tail was farthest to either side within the newest beat.
  const ages = Array.from({ length: 60 }, (_, i) => 0.05 + i * 0.01);
  const farthest = (sign: number) => ages.reduce((a, b) => (sign * tail(b) > sign * tail(a) ? b : a));
  const lane = (await page.locator("#lane-wave").boundingBox())!;
  const lanes = (await page.locator("#lanes").boundingBox())!;
  const { data, width, channels } = await pictureOf(page);
  const warmth = (ageS: number) => {
    const y = Math.round(lane.y - lanes.y + 10 + (ageS / 3) * (lane.height - 20));
    const at = (y * width + Math.round(lanes.width - 28 - 4)) * channels;
    return data[at]! - data[at + 2]!;
  };
  // The picture is dimmed to a third: of some 107 steps between red and blue some 35 are left.
  expect(warmth(farthest(1))).toBeGreaterThan(20);
  expect(warmth(farthest(-1))).toBeLessThan(-15);
});
