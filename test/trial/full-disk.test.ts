/** A disk that is really full: a small file system in memory. Needs the right to mount one, and is skipped without. */
import { execFileSync } from "node:child_process";
import { mkdirSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { expect, onTestFinished, test } from "vitest";
import { emptyCounters } from "../../bridge/link/packets.ts";
import { verifyTrial } from "../../bridge/trial/verify.ts";
import { countingBytes, createRecorder, linkBytes, readAll, START_MS, temporaryFolder } from "./fixtures.ts";

const DISK_BYTES = 256 * 1024;

/** Mounts a file system of DISK_BYTES; null when not allowed to. */
function mountSmallDisk(): string | null {
  const folder = join(temporaryFolder(), "disk");
  mkdirSync(folder);
  try {
    execFileSync("mount", ["-t", "tmpfs", "-o", `size=${DISK_BYTES}`, "bendwatch-test", folder], {
      stdio: "ignore",
    });
  } catch {
    return null;
  }
  onTestFinished(() => {
    execFileSync("umount", [folder]);
  });
  return folder;
}

test("a recording on a full disk goes on once there is room, with every byte in its place", async ({
  skip,
}) => {
  const disk = mountSmallDisk();
  if (disk === null) return skip("mounting a file system is not allowed here");
  const ballast = join(disk, "ballast");
  writeFileSync(ballast, new Uint8Array(128 * 1024));
  const folder = join(disk, "trial");
  const recorder = await createRecorder(folder);
  for (let i = 0; i < 200; i++) recorder.bytes(countingBytes(i * 1000, 1000), START_MS + 10 * i);
  await recorder.drain();
  expect(recorder.state.state).toBe("failed");
  expect(recorder.state.detail).toMatch(/ENOSPC/);
  const atFailure = readAll(folder);
  expect(atFailure.end.kind).toBe("truncated");
  expect(atFailure.records.length).toBeGreaterThan(50);
  rmSync(ballast);
  await recorder.close();
  expect(linkBytes(readAll(folder).records).equals(countingBytes(0, 200_000))).toBe(true);
  const ignored = { push: () => {}, counters: emptyCounters(), complaint: null };
  expect(verifyTrial(folder, () => ignored).problems).toEqual([]);
});
