/**
 * Readable for everybody: text contrast computed here after WCAG 2.2 (success criterion 1.4.3, level AA), and the rules
 * of axe-core, which are written by others.
 */
import axe from "axe-core";
import type { Page } from "playwright-core";
import { expect, onTestFinished, test } from "vitest";
import type { LinkView } from "../../bridge/wire/messages.ts";
import { FakeBridge } from "../support/fake-bridge.ts";
import { longNamesScene, type Scene, sixAxisScene, troubledScene } from "../support/scene.ts";
import { type Light, untilDrawn } from "./page.ts";
import { useBrowser } from "./use-browser.ts";

const open = useBrowser();
const LIGHTS: readonly Light[] = ["dark", "day"];
const LEAST_CONTRAST = 4.5;

async function openScene(scene: Scene, light: Light): Promise<Page> {
  const bridge = await FakeBridge.start(scene);
  onTestFinished(() => bridge.stop());
  const page = await open(bridge.address, { light });
  await untilDrawn(page, 5);
  return page;
}

interface Colours {
  readonly text: string;
  readonly colour: string;
  readonly ground: string;
  /** Of the element and all around it, multiplied. */
  readonly opacity: number;
}

/** Every visible piece of text, its colour, and the first ground beneath it that is not transparent. */
function coloursOfText(page: Page): Promise<Colours[]> {
  return page.evaluate(() => {
    const found: Colours[] = [];
    const walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
    for (let node = walker.nextNode(); node !== null; node = walker.nextNode()) {
      const parent = node.parentElement!;
      if (node.textContent!.trim() === "" || parent.closest(".unseen, script") !== null) continue;
      if (!parent.checkVisibility({ visibilityProperty: true })) continue;
      let ground = "";
      let opacity = 1;
      for (let around: Element | null = parent; around !== null; around = around.parentElement) {
        const style = getComputedStyle(around);
        opacity *= Number(style.opacity);
        if (ground === "" && !/^(transparent|rgba\(.*, 0\))$/.test(style.backgroundColor)) {
          ground = style.backgroundColor;
        }
      }
      found.push({ text: node.textContent!.trim(), colour: getComputedStyle(parent).color, ground, opacity });
    }
    return found;
  });
}

/** Relative luminance of "rgb(r, g, b)", WCAG 2.2. */
function luminance(colour: string): number {
  const channels = /^rgb\((\d+), (\d+), (\d+)\)$/.exec(colour);
  if (channels === null) throw new Error(`not an opaque colour: ${colour}`);
  const [r, g, b] = channels.slice(1).map((channel) => {
    const share = Number(channel) / 255;
    return share <= 0.04045 ? share / 12.92 : ((share + 0.055) / 1.055) ** 2.4;
  });
  return 0.2126 * r! + 0.7152 * g! + 0.0722 * b!;
}

function contrast(a: string, b: string): number {
  const [low, high] = [luminance(a), luminance(b)].sort((x, y) => x - y);
  return (high! + 0.05) / (low! + 0.05);
}

async function tooFaint(page: Page): Promise<string[]> {
  const pieces = await coloursOfText(page);
  expect(pieces.length).toBeGreaterThan(20);
  return pieces
    .filter(({ colour, ground, opacity }) => opacity < 1 || contrast(colour, ground) < LEAST_CONTRAST)
    .map(({ text, colour, ground, opacity }) => `${text}: ${colour} on ${ground}, opacity ${opacity}`);
}

/** What axe finds: WCAG A and AA and its own best practice. */
async function axeFinds(page: Page): Promise<string[]> {
  await page.evaluate(axe.source);
  return page.evaluate(async () => {
    const { axe: engine } = window as unknown as { axe: typeof axe };
    const { violations, passes } = await engine.run(document);
    if (passes.length < 10) return [`only ${passes.length} rules applied`];
    return violations.flatMap(({ id, help, nodes }) => nodes.map(({ html }) => `${id}, ${help}: ${html}`));
  });
}

test("the contrast of black on white is 21, of the lightest grey that passes 4.5", () => {
  expect(contrast("rgb(0, 0, 0)", "rgb(255, 255, 255)")).toBeCloseTo(21, 6);
  // #767676 on white is the example known from WCAG's own techniques (G18): 4.54.
  expect(contrast("rgb(118, 118, 118)", "rgb(255, 255, 255)")).toBeCloseTo(4.54, 2);
});

const SCENES: readonly [string, () => Scene][] = [
  ["trouble", () => troubledScene(6)],
  ["64 sensors in trouble", () => troubledScene(64)],
  ["no magnetometers", () => sixAxisScene()],
  ["long names", longNamesScene],
];

for (const light of LIGHTS) {
  test.each(SCENES)(
    `${light}: all text stands out from its ground, and axe finds nothing: %s`,
    async (_, scene) => {
      const page = await openScene(scene(), light);
      expect(await tooFaint(page)).toEqual([]);
      expect(await axeFinds(page)).toEqual([]);
    },
  );

  test.each<LinkView>(["opening", "silent", "closed", "ended"])(
    `${light}: so too while the link is %s`,
    async (link) => {
      const bridge = await FakeBridge.start(troubledScene(6));
      onTestFinished(() => bridge.stop());
      const page = await open(bridge.address, { light });
      bridge.show({ link, linkDetail: "Invented reason." });
      await page.locator("#notice").waitFor();
      expect(await tooFaint(page)).toEqual([]);
      expect(await axeFinds(page)).toEqual([]);
    },
  );

  test(`${light}: so too with the mark's field and the list of keys open`, async () => {
    const page = await openScene(troubledScene(6), light);
    await page.keyboard.press("m");
    expect(await tooFaint(page)).toEqual([]);
    expect(await axeFinds(page)).toEqual([]);
    await page.keyboard.press("Escape");
    await page.keyboard.press("?");
    await page.locator("#keys").waitFor();
    expect(await tooFaint(page)).toEqual([]);
    expect(await axeFinds(page)).toEqual([]);
  });
}
