/** One browser a test file, one fresh page a call; whatever a page complains about fails its test. */
import type { Browser, BrowserContextOptions, Page } from "playwright-core";
import { afterAll, afterEach, beforeAll, expect } from "vitest";
import { launchChromium } from "../support/chromium.ts";
import { decodePng, type Picture } from "../support/png.ts";

/** The page's own record of its drawing. */
export interface DashboardView {
  readonly renderer: "canvas" | "webgl";
  readonly drawn: number;
  readonly frameIntervalsMs: readonly number[];
  readonly workMs: readonly number[];
  readonly midline: Float32Array;
  readonly hubTimeS: number;
  readonly connection: string;
}

declare global {
  interface Window {
    readonly bendwatchView: DashboardView;
    /** Set by tests to see whether the page was loaded anew, and to keep what it looked like before. */
    before: unknown;
  }
}

export type Light = "dark" | "day";

export interface OpenOptions {
  readonly renderer?: "canvas" | "webgl";
  readonly light?: Light;
  readonly size?: readonly [width: number, height: number];
  /** The page is awaited until the first frames are drawn, unless it will never have one. */
  readonly live?: boolean;
}

/** What Chromium itself logs, whatever the page does: nobody at the other end, or a test reads WebGL's pixels. */
const NOT_THE_PAGE =
  /WebSocket connection to .* failed|net::ERR_CONNECTION_REFUSED|GPU stall due to ReadPixels/;

/**
 * @returns opens a page; after each test pages are closed, and errors in the console, exceptions, failed requests and
 *   violations of the security policy fail it
 */
export function useBrowser(): (address: string, options?: OpenOptions) => Promise<Page> {
  let browser: Browser;
  const complaints: string[] = [];
  beforeAll(async () => {
    browser = await launchChromium();
  });
  afterAll(() => browser.close());
  afterEach(async () => {
    for (const context of browser.contexts()) await context.close();
    expect(complaints.splice(0)).toEqual([]);
  });
  return async (address, options = {}) => {
    const page = await newPage(browser, options);
    page.on("console", (message) => {
      const text = message.text();
      if (["error", "warning"].includes(message.type()) && !NOT_THE_PAGE.test(text)) complaints.push(text);
    });
    page.on("pageerror", (error) => complaints.push(error.message));
    await page.exposeFunction("tellViolation", (text: string) => complaints.push(text));
    await openAddress(page, address, options);
    return page;
  };
}

/** A page in a light and size, in a context of its own. */
export function newPage(
  browser: Browser,
  { light = "dark", size = [1440, 900] }: OpenOptions,
): Promise<Page> {
  const context: BrowserContextOptions = {
    viewport: { width: size[0], height: size[1] },
    colorScheme: light === "dark" ? "dark" : "light",
  };
  return browser.newContext(context).then((made) => made.newPage());
}

export async function openAddress(page: Page, address: string, options: OpenOptions): Promise<void> {
  const { renderer, live = true } = options;
  await page.addInitScript(() => {
    const tell = (window as unknown as { tellViolation?: (text: string) => void }).tellViolation;
    document.addEventListener("securitypolicyviolation", ({ violatedDirective, blockedURI }) => {
      tell?.(`security policy: ${violatedDirective} ${blockedURI}`);
    });
  });
  const url = new URL(address);
  if (renderer !== undefined) url.searchParams.set("renderer", renderer);
  await page.goto(url.href);
  await page.waitForFunction(() => (window.bendwatchView?.drawn ?? 0) > 2);
  if (live) await page.waitForFunction(() => window.bendwatchView.midline.length > 0);
}

/** What is on the canvas alone, without the text above it. */
export async function pictureOf(page: Page): Promise<Picture> {
  const style = "#lanes > :not(canvas) { visibility: hidden }";
  return decodePng(await page.locator("#lanes canvas").screenshot({ style }));
}

/** Resolves when the page's link says so. */
export async function untilLink(page: Page, state: string): Promise<void> {
  await page.waitForFunction(
    (wanted) => document.getElementById("link-state")?.dataset.state === wanted,
    state,
  );
}

/** The text of an element as a reader gets it, white space joined. */
export async function textOf(page: Page, selector: string): Promise<string> {
  return ((await page.locator(selector).textContent()) ?? "").replace(/\s+/g, " ").trim();
}
