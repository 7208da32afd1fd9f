/** Everything can be done by keyboard. */
import type { Page } from "playwright-core";
import { expect, onTestFinished, test } from "vitest";
import { MAX_MARK_LENGTH } from "../../bridge/wire/messages.ts";
import { FakeBridge } from "../support/fake-bridge.ts";
import { textOf } from "./page.ts";
import { useBrowser } from "./use-browser.ts";

const open = useBrowser();

async function start(): Promise<{ bridge: FakeBridge; page: Page }> {
  const bridge = await FakeBridge.start();
  onTestFinished(() => bridge.stop());
  return { bridge, page: await open(bridge.address) };
}

function focused(page: Page): Promise<string> {
  return page.evaluate(() => document.activeElement?.id ?? "");
}

const light = (page: Page) => page.evaluate(() => document.documentElement.dataset.light);

test("Tab reaches Mark first, then every control and every sensor, and the place is seen", async () => {
  const { page } = await start();
  await page.keyboard.press("Tab");
  expect(await focused(page)).toBe("mark-button");
  const outline = await page.locator("#mark-button").evaluate((button) => getComputedStyle(button).outline);
  expect(outline).toMatch(/[2-9]px/);
  const sensors = new Set<string>();
  for (let presses = 0; presses < 30; presses++) {
    await page.keyboard.press("Tab");
    const sensor = await page.evaluate(() => {
      const column = document.activeElement?.closest<HTMLElement>("[data-sensor]");
      return column?.dataset.sensor;
    });
    if (sensor !== undefined) sensors.add(sensor);
  }
  expect([...sensors].sort()).toEqual(["0", "1", "2", "3", "4", "5"]);
});

test("M opens the mark, Enter delivers it to the bridge, and it appears among the marks", async () => {
  const { bridge, page } = await start();
  await page.keyboard.press("m");
  expect(await focused(page)).toBe("mark-text");
  await page.keyboard.type("flow raised, m and l and ? too");
  await page.keyboard.press("Enter");
  await page.locator("#marks li").waitFor();
  expect(bridge.received).toEqual([{ type: "add mark", text: "flow raised, m and l and ? too" }]);
  expect(await textOf(page, "#marks li")).toContain("flow raised");
  // Back where it was: the next M opens a new, empty one.
  expect(await page.locator("#mark-text").isVisible()).toBe(false);
  await page.keyboard.press("m");
  expect(await page.locator("#mark-text").inputValue()).toBe("");
});

test("the button opens the mark too", async () => {
  const { bridge, page } = await start();
  await page.keyboard.press("Tab");
  await page.keyboard.press("Enter");
  await page.keyboard.type("by button");
  await page.keyboard.press("Enter");
  await page.locator("#marks li").waitFor();
  expect(bridge.received).toEqual([{ type: "add mark", text: "by button" }]);
});

test("Esc drops the mark: nothing is sent, and the focus returns to the button", async () => {
  const { bridge, page } = await start();
  await page.keyboard.press("m");
  await page.keyboard.type("not this");
  await page.keyboard.press("Escape");
  expect(await page.locator("#mark-text").isVisible()).toBe(false);
  expect(await focused(page)).toBe("mark-button");
  // A mark set afterwards is the only one that arrives.
  await page.keyboard.press("m");
  await page.keyboard.type("this");
  await page.keyboard.press("Enter");
  await page.locator("#marks li").waitFor();
  expect(bridge.received).toEqual([{ type: "add mark", text: "this" }]);
});

test("no mark is longer than the bridge takes", async () => {
  const { bridge, page } = await start();
  await page.keyboard.press("m");
  await page.keyboard.insertText("x".repeat(MAX_MARK_LENGTH + 50));
  await page.keyboard.press("Enter");
  await page.locator("#marks li").waitFor();
  expect(bridge.received).toEqual([{ type: "add mark", text: "x".repeat(MAX_MARK_LENGTH) }]);
});

test("a mark that cannot be delivered is kept in its field, and said not to have been kept", async () => {
  const { bridge, page } = await start();
  await page.keyboard.press("m");
  await page.keyboard.type("while nobody listens");
  await bridge.stop();
  await page.waitForFunction(() => document.getElementById("link-state")?.dataset.state === "gone");
  await page.keyboard.press("Enter");
  expect(await page.locator("#mark-text").inputValue()).toBe("while nobody listens");
  await bridge.listen();
  await page.waitForFunction(() => document.getElementById("link-state")?.dataset.state === "flowing");
  await page.keyboard.press("Enter");
  await page.locator("#marks li").waitFor();
  expect(bridge.received).toEqual([{ type: "add mark", text: "while nobody listens" }]);
});

test("? shows the keys, each with what it does; Esc closes them", async () => {
  const { page } = await start();
  await page.keyboard.press("?");
  await page.locator("#keys").waitFor();
  const text = await textOf(page, "#keys");
  for (const key of ["M", "L", "?", "Esc"]) expect(text).toContain(key);
  await page.keyboard.press("Escape");
  await page.locator("#keys").waitFor({ state: "hidden" });
});

test("L switches the light, and the page remembers it", async () => {
  const { page } = await start();
  const ground = () => page.evaluate(() => getComputedStyle(document.body).backgroundColor);
  expect(await light(page)).toBe("dark");
  const darkGround = await ground();
  await page.keyboard.press("l");
  expect(await light(page)).toBe("day");
  expect(await ground()).not.toBe(darkGround);
  await page.reload();
  await page.waitForFunction(() => window.bendwatchView?.drawn > 2);
  expect(await light(page)).toBe("day");
  await page.keyboard.press("l");
  expect(await light(page)).toBe("dark");
});

test("until somebody chooses, the light is the one that the system prefers", async () => {
  const bridge = await FakeBridge.start();
  onTestFinished(() => bridge.stop());
  for (const wanted of ["dark", "day"] as const) {
    expect(await light(await open(bridge.address, { light: wanted }))).toBe(wanted);
  }
});

test("keys with Ctrl or Alt are left to the browser", async () => {
  const { page } = await start();
  await page.keyboard.press("Alt+l");
  await page.keyboard.press("Alt+m");
  expect(await light(page)).toBe("dark");
  expect(await page.locator("#mark-text").isVisible()).toBe(false);
});

test("a mark that the bridge refuses comes back into its field with the reason, and can be sent again", async () => {
  const { bridge, page } = await start();
  bridge.refusing = "too many messages";
  await page.keyboard.press("m");
  await page.keyboard.type("flow raised");
  await page.keyboard.press("Enter");
  await page.getByText("Not kept: too many messages").waitFor();
  expect(await page.locator("#mark-text").inputValue()).toBe("flow raised");
  expect(await focused(page)).toBe("mark-text");
  bridge.refusing = null;
  await page.keyboard.press("Enter");
  await page.locator("#marks li", { hasText: "flow raised" }).waitFor();
  expect(await page.locator("#mark-text").isVisible()).toBe(false);
});

test("H leads to the choice of what holds the headings; what is chosen reaches the bridge and is told", async () => {
  const { bridge, page } = await start();
  await page.keyboard.press("h");
  expect(await focused(page)).toBe("heading");
  await page.keyboard.press("ArrowDown");
  await page.getByText("Heading: held by the body").waitFor();
  expect(bridge.received).toEqual([{ type: "choose", heading: "relative" }]);
  // Letters that are keys elsewhere choose here.
  await page.keyboard.type("m");
  expect(await page.locator("#mark-text").isVisible()).toBe(false);
});
