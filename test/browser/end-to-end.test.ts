/** The built program and its page together, nothing invented between them. */
import type { Page } from "playwright-core";
import { expect, test } from "vitest";
import { startBridge, viewStream } from "../support/bridge-process.ts";
import { textOf, untilLink } from "./page.ts";
import { useBrowser } from "./use-browser.ts";

const open = useBrowser();

function midline(page: Page): Promise<number[]> {
  return page.evaluate(() => [...window.bendwatchView.midline]);
}

async function untilMoved(page: Page, from: readonly number[]): Promise<void> {
  // A millimetre at the tail tip: a hundred times what rounding would do.
  await page.waitForFunction(
    (tail) => Math.abs(window.bendwatchView.midline.at(-2)! - tail) > 1e-3,
    from.at(-2)!,
  );
}

async function setMark(page: Page, text: string): Promise<void> {
  await page.keyboard.press("m");
  await page.keyboard.type(text);
  await page.keyboard.press("Enter");
}

test("a rehearsed foil swims on the page; a magnet at S4 is flagged there while it lasts, and not after", async () => {
  const bridge = await startBridge("rehearse", "--rig", "ribbon-foil", "--fault", "magnet:S4@6+4");
  const page = await open(bridge.address);
  await untilLink(page, "flowing");
  const first = await midline(page);
  await untilMoved(page, first);
  expect(await page.locator("[data-sensor]").count()).toBe(6);
  const flag = page.locator("#flags li[data-kind='magnetic interference']");
  expect(await flag.count()).toBe(0);
  await flag.waitFor();
  expect(await textOf(page, "#flags li")).toContain("S4");
  await flag.waitFor({ state: "detached" });
  await page.locator("#ended li", { hasText: "S4 magnetic interference" }).waitFor();
  // Beating steadily since: the tailbeat is read.
  await page.waitForFunction(() => /\d\.\d\d/.test(document.getElementById("tailbeat")!.textContent!));
});

test("the page shows what another viewer of the same stream receives", async () => {
  const bridge = await startBridge("rehearse", "--rig", "ribbon-foil");
  const page = await open(bridge.address);
  const viewer = await viewStream(bridge.address);
  // The two draw at their own pace: at some moment both hold the same frame.
  const seen = new Map<number, number[]>();
  let match: readonly [number[], number[]] | undefined;
  while (match === undefined) {
    const frames = viewer.frames;
    await viewer.until(({ frames: now }) => now > frames);
    seen.set(viewer.frame.hubTimeS, [...viewer.frame.midline]);
    const shown = await page.evaluate(() => ({
      hubTimeS: window.bendwatchView.hubTimeS,
      midline: [...window.bendwatchView.midline],
    }));
    const sent = seen.get(shown.hubTimeS);
    if (sent !== undefined) match = [shown.midline, sent];
  }
  expect(match[0]).toEqual(match[1]);
});

test("a bridge that is killed is told to be gone; a new one on its port is found, and its run starts afresh", async () => {
  const bridge = await startBridge("rehearse", "--rig", "ribbon-foil");
  const page = await open(bridge.address);
  await setMark(page, "of the first run");
  await page.locator("#marks li").waitFor();
  bridge.child.kill("SIGKILL");
  await bridge.finished;
  await untilLink(page, "gone");
  const port = new URL(bridge.address).port;
  await startBridge("rehearse", "--rig", "ribbon-foil", "--http-port", port);
  await untilLink(page, "flowing");
  await page.locator("#marks li").waitFor({ state: "detached" });
  await untilMoved(page, await midline(page));
});

test("a mark set on the page is known to every other viewer", async () => {
  const bridge = await startBridge("rehearse", "--rig", "ribbon-foil");
  const [page, other] = [await open(bridge.address), await open(bridge.address)];
  await setMark(page, "tail clip moved");
  await other.locator("#marks li", { hasText: "tail clip moved" }).waitFor();
});
