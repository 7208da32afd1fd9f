/** Opens the dashboard in a browser, and reads what it shows. */
import type { Browser, BrowserContextOptions, Page } from "playwright-core";
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

/** Resolves when the page has drawn so many times from now on. */
export async function untilDrawn(page: Page, times: number): Promise<void> {
  const until = times + (await page.evaluate(() => window.bendwatchView.drawn));
  await page.waitForFunction((count) => window.bendwatchView.drawn >= count, until);
}

/** The text of an element as a reader gets it, white space joined. */
export async function textOf(page: Page, selector: string): Promise<string> {
  return ((await page.locator(selector).textContent()) ?? "").replace(/\s+/g, " ").trim();
}
