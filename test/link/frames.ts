/** For the tests of framings: runs a framer over bytes cut into chunks and keeps what comes out. */
import { type FrameHandler, type Framer, VERDICT, type Verdict } from "../../bridge/link/framing.ts";
import { emptyCounters, type LinkCounters } from "../../bridge/link/packets.ts";
import { pushCut } from "./log.ts";

export interface Framed {
  readonly frames: string[];
  readonly badChecksum: number;
  readonly overLong: number;
  readonly discardedBytes: number;
}

/** @param judge the verdict on each frame; all are good if left out */
export function runFramer(
  make: (counters: LinkCounters, onFrame: FrameHandler) => Framer,
  bytes: Uint8Array,
  cuts: readonly number[] = [],
  judge: (frame: Uint8Array) => Verdict = () => VERDICT.GOOD,
): Framed {
  const frames: string[] = [];
  const counters = emptyCounters();
  const framer = make(counters, (length) => {
    const frame = framer.buffer.slice(0, length);
    const verdict = judge(frame);
    if (verdict === VERDICT.GOOD) frames.push(Buffer.from(frame).toString("hex"));
    return verdict;
  });
  pushCut(framer, bytes, cuts);
  const { badChecksum, overLong, discardedBytes } = counters;
  return { frames, badChecksum, overLong, discardedBytes };
}
