/** The page says in words what the link does, finds a bridge that comes back, and never shows an old picture as live. */
import type { Page } from "playwright-core";
import { expect, onTestFinished, test } from "vitest";
import type { LinkView } from "../../bridge/wire/messages.ts";
import { FakeBridge, startPageWithoutStream } from "../support/fake-bridge.ts";
import { type Scene, sensorsOf } from "../support/scene.ts";
import { pictureOf, textOf, untilDrawn, untilLink } from "./page.ts";
import { useBrowser } from "./use-browser.ts";

const open = useBrowser();

async function startBridge(change: Partial<Scene> = {}): Promise<FakeBridge> {
  const bridge = await FakeBridge.start(change);
  onTestFinished(() => bridge.stop());
  return bridge;
}

function noticeShows(page: Page): Promise<boolean> {
  return page.locator("#notice").isVisible();
}

test("while sweeps flow the link says how many, and nothing covers the lanes", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  await untilLink(page, "flowing");
  expect(await textOf(page, "#link-state")).toMatch(/6 sensors.*100/);
  expect(await noticeShows(page)).toBe(false);
});

const STATES: readonly [LinkView, string, RegExp][] = [
  ["opening", "Waiting for /dev/ttyUSB7 to appear.", /wait/i],
  ["silent", "Nothing has come for 3 s.", /silent/i],
  ["closed", "/dev/ttyUSB7 was unplugged.", /closed|unplugged/i],
  ["ended", "The trial is over.", /end/i],
];

test.each(STATES)("%s is told in words, with what the bridge says about it", async (link, detail, words) => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  bridge.show({ link, linkDetail: detail });
  await untilLink(page, link);
  expect(await textOf(page, "#link-state")).toMatch(words);
  await page.locator("#notice").waitFor();
  expect(await textOf(page, "#notice")).toContain(detail.replace(/\.$/, ""));
  bridge.show({ link: "flowing", linkDetail: "" });
  await page.locator("#notice").waitFor({ state: "hidden" });
});

test.each(["silent", "closed"] as const)(
  "%s: the notice says how old the shape is, and counts on",
  async (link) => {
    const bridge = await startBridge();
    const page = await open(bridge.address);
    bridge.show({ link, linkDetail: "" });
    await page.locator("#notice").waitFor();
    const age = /\d+(\.\d+)? (s|min)/;
    const first = age.exec(await textOf(page, "#notice"))![0];
    await page.waitForFunction(
      (before) => !document.getElementById("notice")!.textContent!.includes(before),
      first,
    );
    expect(await textOf(page, "#notice")).toMatch(age);
  },
);

test("an old picture is dimmed: what is no longer live does not look live", async () => {
  const bridge = await startBridge({ wave: { frequencyHz: 0, waves: 0.5, tailShare: 0.1 } });
  const page = await open(bridge.address);
  await untilDrawn(page, 10);
  const strength = async () => {
    const { data, channels } = await pictureOf(page);
    let sum = 0;
    for (let at = 0; at < data.length; at += channels) sum += Math.abs(data[at]! - data[0]!);
    return sum / data.length;
  };
  const live = await strength();
  bridge.show({ link: "closed", linkDetail: "Unplugged." });
  await untilLink(page, "closed");
  await untilDrawn(page, 2);
  expect(await strength()).toBeLessThan(live * 0.7);
});

test("a bridge that ends and starts again on its port is found by itself, without loading the page anew", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  await page.evaluate(() => {
    window.before = "kept";
  });
  await bridge.stop();
  await untilLink(page, "gone");
  expect(await textOf(page, "#link-state")).toMatch(/gone/i);
  expect(await noticeShows(page)).toBe(true);
  await bridge.listen();
  await untilLink(page, "flowing");
  const hubTimeS = await page.evaluate(() => window.bendwatchView.hubTimeS);
  await page.waitForFunction((before) => window.bendwatchView.hubTimeS > before, hubTimeS);
  expect(await noticeShows(page)).toBe(false);
  expect(await page.evaluate(() => window.before)).toBe("kept");
});

test("before the stream answers, the page says that it is connecting and what to do", async () => {
  const bridge = await startPageWithoutStream("silent");
  onTestFinished(() => bridge.stop());
  const page = await open(bridge.address, { live: false });
  await untilLink(page, "connecting");
  await page.locator("#notice").waitFor();
  expect(await textOf(page, "#notice")).toMatch(/connecting/i);
  expect(await textOf(page, "#flags")).not.toMatch(/nothing speaks against/i);
});

test("a bridge that refuses the stream is told from one that is gone, and says what to do", async () => {
  const bridge = await startPageWithoutStream("refuses");
  onTestFinished(() => bridge.stop());
  const page = await open(bridge.address, { live: false });
  await untilLink(page, "refused");
  expect(await textOf(page, "#notice")).toMatch(/refuses.*token/i);
});

test("frames of another version are not drawn, and are told in words", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  bridge.sendBytes(new Uint8Array([0x57, 0x42, 2, 0, 0, 0]));
  await untilLink(page, "other version");
  expect(await textOf(page, "#notice")).toMatch(/different versions.*reload/i);
});

test("a token in the address is passed on to the stream", async () => {
  const bridge = await FakeBridge.start({}, { token: "an-invented-token" });
  onTestFinished(() => bridge.stop());
  expect(bridge.address).toContain("?token=");
  const page = await open(bridge.address);
  await untilLink(page, "flowing");
});

test.each([
  [{ state: "on", detail: "trial 7", elapsedS: 252, bytes: 4e6 }, /04:12|4:12|252/],
  [{ state: "failed", detail: "the disk is full", elapsedS: 252, bytes: 4e6 }, /fail/i],
  [{ state: "off", detail: "", elapsedS: 0, bytes: 0 }, /not record/i],
] as const)("recording $state is told in words", async (recording, words) => {
  const bridge = await startBridge({ recording });
  const page = await open(bridge.address);
  await page.waitForFunction(() => document.getElementById("recording")?.textContent !== "");
  expect(await textOf(page, "#recording")).toMatch(words);
  if (recording.state === "failed") {
    expect(await page.getByText(recording.detail).count()).toBe(1);
  }
});

test("the rig and where its bytes come from stand in the header", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  expect(await textOf(page, "#rig-name")).toBe(bridge.scene.rigName);
  expect(await textOf(page, "#source")).toContain(bridge.scene.source.label);
});

test("a run with other sensors on the same address replaces the columns", async () => {
  const bridge = await startBridge();
  const page = await open(bridge.address);
  expect(await page.locator("[data-sensor]").count()).toBe(6);
  bridge.show({ sensors: sensorsOf(5) });
  bridge.startOver();
  await page.waitForFunction(() => document.querySelectorAll("[data-sensor]").length === 5);
  await page.waitForFunction(() => window.bendwatchView.hubTimeS < 5);
  expect(await page.locator("[data-sensor='4'] .name").textContent()).toBe("S5");
});
