/**
 * SLIP against J. Romkey, RFC 1055, 1988 (from memory): END is 192, ESC 219, ESC_END 220, ESC_ESC 221 (octal 300, 333,
 * 334, 335); a sender may begin with END to flush noise; empty frames are to be ignored.
 */
import { expect, test } from "vitest";
import { SlipFramer } from "../../bridge/link/slip.ts";
import { runFramer } from "../link/frames.ts";
import { hex } from "../link/log.ts";

const run = (text: string) =>
  runFramer((counters, onFrame) => new SlipFramer(64, counters, onFrame), hex(text));

test.each([
  ["plain data", "01 02 03 c0", ["010203"]],
  ["END in the data is sent as ESC ESC_END", "01 db dc 02 c0", ["01c002"]],
  ["ESC in the data is sent as ESC ESC_ESC", "01 db dd 02 c0", ["01db02"]],
  ["ESC_END and ESC_ESC by themselves are data", "dc dd c0", ["dcdd"]],
  ["END and ESC one after the other", "db dc db dd db dd db dc c0", ["c0dbdbc0"]],
  ["END before each packet", "c0 01 02 c0 c0 03 c0", ["0102", "03"]],
  ["nothing but END", "c0 c0 c0", []],
])("%s", (_title, bytes, frames) => {
  expect(run(bytes)).toEqual({ frames, badChecksum: 0, overLong: 0, discardedBytes: 0 });
});
