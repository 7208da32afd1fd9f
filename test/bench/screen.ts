/**
 * How evenly the page draws, and how much of the main thread that takes: 1440 x 900, 16 sensors, 60 frames a second,
 * Chromium without a GPU on this machine. And how much there is to load.
 */
import { readdirSync, readFileSync } from "node:fs";
import { extname, join } from "node:path";
import { gzipSync } from "node:zlib";
import { packageRoot } from "../../bridge/paths.ts";
import { newPage, openAddress } from "../browser/page.ts";
import { launchChromium } from "../support/chromium.ts";
import { FakeBridge } from "../support/fake-bridge.ts";
import { troubledScene } from "../support/scene.ts";

export const name = "screen: drawing at 60 frames a second without a GPU, 16 sensors, 1440 x 900";

const SECONDS = 10;
const WARM_UP_S = 3;

export async function run(): Promise<{ rows: Record<string, string | number>[]; json: unknown }> {
  const bridge = await FakeBridge.start({ ...troubledScene(16), lengthM: 1.2, rateHz: 200 });
  const browser = await launchChromium();
  try {
    const page = await newPage(browser, { size: [1440, 900] });
    const loaded: string[] = [];
    page.on("requestfinished", (request) => loaded.push(new URL(request.url()).pathname));
    await openAddress(page, bridge.address, {});
    await untilHubTime(bridge.scene.startS + WARM_UP_S);
    const before = await page.evaluate(() => window.bendwatchView.drawn);
    await untilHubTime(bridge.hubTimeS + SECONDS);
    const view = await page.evaluate((first) => {
      const { drawn, frameIntervalsMs, workMs, renderer } = window.bendwatchView;
      const count = drawn - first;
      return {
        renderer,
        frames: count,
        frameIntervalsMs: frameIntervalsMs.slice(-count),
        workMs: workMs.slice(-count),
      };
    }, before);
    const json = {
      renderer: view.renderer,
      frames: view.frames,
      frameIntervalMs: spread(view.frameIntervalsMs),
      mainThreadWorkMs: spread(view.workMs),
      loadedGzipBytes: gzipBytes(loaded),
      builtGzipBytes: gzipBytes(builtFiles()),
    };
    return { rows: [rowOf(json)], json };
  } finally {
    await browser.close();
    await bridge.stop();
  }

  async function untilHubTime(timeS: number): Promise<void> {
    while (bridge.hubTimeS < timeS) await new Promise((resolve) => setTimeout(resolve, 50));
  }
}

interface Spread {
  readonly median: number;
  readonly p95: number;
  readonly greatest: number;
}

function spread(values: readonly number[]): Spread {
  const sorted = [...values].sort((a, b) => a - b);
  const at = (share: number) => sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))]!;
  return { median: at(0.5), p95: at(0.95), greatest: at(1) };
}

const DASHBOARD = join(packageRoot, "dist", "dashboard");

function builtFiles(): string[] {
  return readdirSync(DASHBOARD, { withFileTypes: true, recursive: true })
    .filter((entry) => entry.isFile() && [".html", ".js", ".css"].includes(extname(entry.name)))
    .map((entry) => join(entry.parentPath, entry.name).slice(DASHBOARD.length));
}

/** Of files of the dashboard, by their paths on the server, each compressed by itself. */
function gzipBytes(paths: readonly string[]): number {
  return paths
    .map((path) => (path === "/" ? "/index.html" : path))
    .filter((path) => extname(path) !== "")
    .reduce((sum, path) => sum + gzipSync(readFileSync(join(DASHBOARD, path))).length, 0);
}

function rowOf(result: {
  readonly renderer: string;
  readonly frames: number;
  readonly frameIntervalMs: Spread;
  readonly mainThreadWorkMs: Spread;
  readonly loadedGzipBytes: number;
  readonly builtGzipBytes: number;
}): Record<string, string | number> {
  const ms = ({ median, p95 }: Spread) => `${median.toFixed(1)} / ${p95.toFixed(1)}`;
  return {
    renderer: result.renderer,
    frames: result.frames,
    "interval ms, median / p95": ms(result.frameIntervalMs),
    "work ms, median / p95": ms(result.mainThreadWorkMs),
    "loaded, kB gzip": Math.round(result.loadedGzipBytes / 1000),
    "all built, kB gzip": Math.round(result.builtGzipBytes / 1000),
  };
}
