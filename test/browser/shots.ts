/** Pictures of the page to look at: `npx tsx test/browser/shots.ts [folder]`, by default test/browser/shots/. */
import { mkdirSync } from "node:fs";
import { join, resolve } from "node:path";
import type { Browser, Page } from "playwright-core";
import { launchChromium } from "../support/chromium.ts";
import { FakeBridge, startPageWithoutStream } from "../support/fake-bridge.ts";
import {
  drivenScene,
  healthyScene,
  longNamesScene,
  type Scene,
  sixAxisScene,
  troubledScene,
} from "../support/scene.ts";
import { type Light, newPage, openAddress, untilDrawn, untilLink } from "./page.ts";

const SIZES = [
  [1440, 900],
  [1920, 1080],
  [1280, 720],
  [1024, 768],
] as const;
const LIGHTS: readonly Light[] = ["dark", "day"];

interface Shot {
  readonly title: string;
  readonly scene?: () => Scene;
  /** What happens once the wave fills its lane. */
  readonly next?: (bridge: FakeBridge, page: Page) => Promise<void>;
}

function afterwards(link: "silent" | "closed", linkDetail: string): NonNullable<Shot["next"]> {
  return async (bridge, page) => {
    bridge.show({ link, linkDetail });
    await untilLink(page, link);
  };
}

const SHOTS: readonly Shot[] = [
  { title: "healthy" },
  { title: "trouble", scene: () => troubledScene(6) },
  {
    title: "16-sensors",
    scene: () => ({ ...troubledScene(16), rigName: "Long dummy, flume 1", lengthM: 1.2 }),
  },
  { title: "64-sensors", scene: () => ({ ...troubledScene(64), rigName: "Long chain", lengthM: 2.4 }) },
  { title: "long-names", scene: longNamesScene },
  { title: "six-axis-heading-free", scene: () => sixAxisScene() },
  { title: "driven", scene: drivenScene },
  { title: "driven-trouble", scene: () => drivenScene(troubledScene(6)) },
  { title: "connecting" },
  { title: "silent", next: afterwards("silent", "No bytes from the hub.") },
  { title: "closed", next: afterwards("closed", "The port /dev/ttyUSB0 was unplugged.") },
  {
    title: "gone",
    async next(bridge, page) {
      await bridge.stop();
      await untilLink(page, "gone");
    },
  },
];

/** Writes `<scene>-<light>-<width>x<height>.png` of every scene, light and size into `folder`. */
export async function takeShots(folder: string): Promise<void> {
  mkdirSync(folder, { recursive: true });
  const browser = await launchChromium();
  try {
    for (const shot of SHOTS) for (const light of LIGHTS) await takeSizes(browser, shot, light, folder);
  } finally {
    await browser.close();
  }
}

async function takeSizes(browser: Browser, shot: Shot, light: Light, folder: string): Promise<void> {
  const live = shot.title !== "connecting";
  const bridge = live ? await FakeBridge.start(shot.scene?.() ?? healthyScene()) : null;
  const server = bridge ?? (await startPageWithoutStream("silent"));
  const page = await newPage(browser, { light });
  await openAddress(page, server.address, { live });
  if (bridge !== null) {
    await page.waitForFunction((s) => window.bendwatchView.hubTimeS > s, bridge.scene.startS + 3.2);
    await shot.next?.(bridge, page);
  }
  for (const [width, height] of SIZES) {
    await page.setViewportSize({ width, height });
    await untilDrawn(page, 4);
    await page.screenshot({ path: join(folder, `${shot.title}-${light}-${width}x${height}.png`) });
  }
  await page.context().close();
  await server.stop();
}

if (process.argv[1] === import.meta.filename) {
  await takeShots(resolve(process.argv[2] ?? join(import.meta.dirname, "shots")));
}
