import { expect, test } from "vitest";
import { FlagBook } from "../../bridge/health/flag-book.ts";
import { checkDisk, type DiskWatchOptions, watchDisk } from "../../bridge/serve/disk-watch.ts";
import { THRESHOLDS } from "../support/health-bench.ts";
import { temporaryFolder } from "../trial/fixtures.ts";

const thresholds = { ...THRESHOLDS, diskLeastMinutes: 60 };
const MEGABYTE = 1e6;

/** A recording of 10 kB a second: 36 MB an hour. */
function watched(elapsedS = 100) {
  const flags = new FlagBook([]);
  let free = 0;
  const options: DiskWatchOptions = {
    recorder: {
      folder: "trial",
      state: { state: "on", detail: "", elapsedS, bytes: 10_000 * elapsedS },
    },
    thresholds,
    run: () => ({ flags, timeS: 7 }),
    freeBytes: () => Promise.resolve(free),
  };
  const look = async (freeBytes: number) => {
    free = freeBytes;
    await checkDisk(options);
    return flags.open.map(({ kind, severity, detail }) => `${severity}: ${kind}, ${detail}`);
  };
  return { look, options };
}

test("is told while there is room for less than an hour, gets worse, and ends with room to spare", async () => {
  const { look } = watched();
  expect(await look(37 * MEGABYTE)).toEqual([]);
  expect(await look(35 * MEGABYTE)).toEqual(["caution: disk nearly full, 35 MB free: room for 58 minutes"]);
  expect(await look(5 * MEGABYTE)).toEqual(["alarm: disk nearly full, 5 MB free: room for 8 minutes"]);
  expect(await look(38 * MEGABYTE)).toHaveLength(1);
  expect(await look(40 * MEGABYTE)).toEqual([]);
});

test("before the pace is known a busy link is assumed", async () => {
  const { look } = watched(2);
  expect(await look(300 * MEGABYTE)).toHaveLength(1);
  expect(await look(400 * MEGABYTE)).toEqual([]);
});

test("a disk that cannot be asked says nothing", async () => {
  const { options } = watched();
  const { flags } = options.run();
  await checkDisk({ ...options, freeBytes: () => Promise.reject(new Error("no such disk")) });
  expect(flags.open).toEqual([]);
});

test("looks at the real disk at once", async () => {
  const { options } = watched();
  const { freeBytes: _, ...real } = options;
  const folder = temporaryFolder();
  const stop = watchDisk({
    ...real,
    recorder: { ...options.recorder, folder },
    // No disk has room for so long.
    thresholds: { ...thresholds, diskLeastMinutes: 1e12 },
  });
  await expect.poll(() => options.run().flags.open.map(({ kind }) => kind)).toEqual(["disk nearly full"]);
  stop();
});
