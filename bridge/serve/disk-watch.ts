/**
 * Watches the room on the disk that a trial is recorded on, and raises a flag long before it is full: trouble of this
 * computer, not of the trial's bytes, so a replay does not have it. A disk that cannot be asked says nothing.
 */
import { statfs } from "node:fs/promises";
import type { FlagBook } from "../health/flag-book.ts";
import type { Thresholds } from "../rig/thresholds.ts";
import type { TrialRecorder } from "../trial/recorder.ts";

const KIND = "disk nearly full";
const CHECK_MS = 5000;
/** Until so much has been recorded, its pace is not known, and this one is assumed: a busy link of 921 600 baud. */
const PACE_KNOWN_S = 10;
const BUSY_BYTES_PER_S = 92_000;
const LEAST_BYTES_PER_S = 1000;
/** Below this share of the time asked for it is an alarm; above 1 plus it the flag ends. */
const ALARM_SHARE = 1 / 6;
const RELEASE_SHARE = 0.1;

export interface DiskWatchOptions {
  readonly recorder: Pick<TrialRecorder, "folder" | "state">;
  readonly thresholds: Thresholds;
  /** Of the present run. */
  readonly run: () => { readonly flags: FlagBook; readonly timeS: number };
  /** Bytes free on the disk of a folder. */
  readonly freeBytes?: (folder: string) => Promise<number>;
}

/** Starts watching; the first look is at once. @returns what ends it */
export function watchDisk(options: DiskWatchOptions): () => void {
  void checkDisk(options);
  const timer = setInterval(() => void checkDisk(options), CHECK_MS);
  return () => clearInterval(timer);
}

/** One look. Never rejects. */
export async function checkDisk(options: DiskWatchOptions): Promise<void> {
  const { recorder, thresholds, run, freeBytes = freeOf } = options;
  let free: number;
  try {
    free = await freeBytes(recorder.folder);
  } catch {
    return;
  }
  const { elapsedS, bytes } = recorder.state;
  const measured = Math.max(LEAST_BYTES_PER_S, bytes / elapsedS);
  const minutes = free / (elapsedS >= PACE_KNOWN_S ? measured : BUSY_BYTES_PER_S) / 60;
  const { flags, timeS } = run();
  const least = thresholds.diskLeastMinutes;
  if (minutes < least) {
    const severity = minutes < least * ALARM_SHARE ? "alarm" : "caution";
    const detail = `${(free / 1e6).toFixed(0)} MB free: room for ${minutes.toFixed(0)} minutes`;
    flags.raise(KIND, -1, severity, timeS, detail);
  } else if (minutes >= least * (1 + RELEASE_SHARE)) flags.clear(KIND, -1, timeS);
}

async function freeOf(folder: string): Promise<number> {
  const { bavail, bsize } = await statfs(folder);
  return bavail * bsize;
}
