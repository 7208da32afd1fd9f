/**
 * A headless Chromium for the browser tests: one that is installed, or the one that comes with the development
 * dependencies, unpacked once, with the shared libraries and fonts that it needs. Nothing has to be installed by hand.
 */
import { execFile } from "node:child_process";
import { existsSync, mkdirSync, mkdtempSync, readFileSync, renameSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { promisify } from "node:util";
import { type Browser, chromium } from "playwright-core";
import { packageRoot } from "../../bridge/paths.ts";

const INSTALLED = [
  process.env.CHROMIUM_PATH,
  "/usr/bin/chromium",
  "/usr/bin/chromium-browser",
  "/usr/bin/google-chrome",
  "/usr/bin/google-chrome-stable",
  "/Applications/Google Chrome.app/Contents/MacOS/Google Chrome",
];

const ARGUMENTS = [
  "--headless",
  "--no-sandbox",
  "--disable-gpu",
  "--disable-quic",
  "--no-first-run",
  "--disable-background-networking",
  "--disable-component-update",
  "--disable-sync",
];

/** WebGL computed by the processor, for want of a GPU. */
const SOFTWARE_WEBGL = ["--use-angle=swiftshader", "--enable-unsafe-swiftshader"];

/** Starts a browser of its own. The caller closes it. */
export async function launchChromium(): Promise<Browser> {
  const installed = INSTALLED.find((path) => path !== undefined && existsSync(path));
  const found = installed === undefined ? await bundled() : { executablePath: installed };
  return chromium.launch({ ...found, args: [...ARGUMENTS, ...SOFTWARE_WEBGL] });
}

interface Bundled {
  readonly executablePath: string;
  readonly env: Record<string, string>;
}

async function bundled(): Promise<Bundled> {
  const modules = join(packageRoot, "node_modules");
  const manifest = readFileSync(join(modules, "@sparticuz", "chromium", "package.json"), "utf8");
  const { version } = JSON.parse(manifest) as { version: string };
  const cache = join(modules, ".cache");
  const folder = join(cache, `chromium-${version}`);
  if (!existsSync(folder)) await unpack(cache, folder);
  return {
    executablePath: join(folder, "chromium"),
    // For the browser alone: the libraries are older than what else may run here.
    env: {
      ...(process.env as Record<string, string>),
      LD_LIBRARY_PATH: join(folder, "al2023", "lib"),
      FONTCONFIG_FILE: join(folder, "fonts.conf"),
    },
  };
}

/** Unpacks beside, then renames: test files run at the same time, and none may see half a browser. */
async function unpack(cache: string, folder: string): Promise<void> {
  mkdirSync(cache, { recursive: true });
  const beside = mkdtempSync(join(cache, "unpacking-"));
  const script = 'await (await import("@sparticuz/chromium")).default.executablePath()';
  await promisify(execFile)(process.execPath, ["--input-type=module", "--eval", script], {
    cwd: packageRoot,
    // The package unpacks into the temporary folder, and its libraries only where it takes the machine for a bare one.
    env: { ...process.env, TMPDIR: beside, AWS_EXECUTION_ENV: "AWS_Lambda_nodejs20.x" },
  });
  writeFileSync(join(beside, "fonts.conf"), fontsConfig(join(folder, "fonts")));
  try {
    renameSync(beside, folder);
  } catch (error) {
    rmSync(beside, { recursive: true });
    if (!existsSync(folder)) throw error;
  }
}

/** The package's fonts alone: text is as wide on every machine. */
function fontsConfig(folder: string): string {
  return `<?xml version="1.0"?>
<!DOCTYPE fontconfig SYSTEM "fonts.dtd">
<fontconfig>
  <dir>${folder}</dir>
  <cachedir>${folder}-cache</cachedir>
</fontconfig>
`;
}
