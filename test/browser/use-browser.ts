/** One browser a test file, one fresh page a call; whatever a page complains about fails its test. */
import type { Browser, Page } from "playwright-core";
import { afterAll, afterEach, beforeAll, expect } from "vitest";
import { launchChromium } from "../support/chromium.ts";
import { newPage, type OpenOptions, openAddress } from "./page.ts";

declare global {
  interface Window {
    complain(text: string): void;
  }
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
    await page.exposeFunction("complain", (text: string) => complaints.push(text));
    await page.addInitScript(() => {
      document.addEventListener("securitypolicyviolation", ({ violatedDirective, blockedURI }) => {
        window.complain(`security policy: ${violatedDirective} ${blockedURI}`);
      });
    });
    await openAddress(page, address, options);
    return page;
  };
}
