/**
 * What all framings share. A framer is a state machine fed with chunks of any size; it owns one buffer of the longest
 * legal frame and hands each complete frame to a callback as the first `length` bytes of that buffer: borrowed, valid
 * during the call.
 *
 * The callback's verdict tells the framer what to count, and length-framed ones where to go on. Every byte ends either
 * in an accepted frame or in `discardedBytes`, but for delimiters standing alone, which belong to no frame, and the
 * bytes of the frame now being received.
 */
import type { LinkCounters } from "./packets.ts";

export const VERDICT = {
  /** A packet, passed on (or a comment, rightly left alone). */
  GOOD: 0,
  /** Intact, so the next frame starts behind it, but not passed on. */
  REFUSED: 1,
  /** Wrong checksum: where it ends cannot be believed either. */
  BROKEN: 2,
} as const;
export type Verdict = (typeof VERDICT)[keyof typeof VERDICT];

export type FrameHandler = (length: number) => Verdict;

export interface Framer {
  /** Holds the frame handed over; the same for the framer's whole life. */
  readonly buffer: Uint8Array;
  /** Takes a chunk of any size, empty ones too. Never throws by itself. */
  push(chunk: Uint8Array): void;
}

/**
 * For framings with a delimiter: counts what a handed-over frame came to.
 * @param rawBytes what it took on the line, coding and delimiter included
 */
export function countFrame(counters: LinkCounters, verdict: Verdict, rawBytes: number): void {
  if (verdict === VERDICT.GOOD) return;
  counters.discardedBytes += rawBytes;
  if (verdict === VERDICT.BROKEN) counters.badChecksum++;
}
