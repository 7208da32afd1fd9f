import { expect, test } from "vitest";
import { TRUST } from "../../bridge/sweep.ts";
import { createDisplayFrame, encodeFrame, frameBytes } from "../../bridge/wire/frame.ts";
import type { WelcomeMessage } from "../../bridge/wire/messages.ts";
import { TRUST_WORDS } from "../../bridge/wire/trust.ts";
import {
  createViewState,
  hubTimeNow,
  isLive,
  linkWord,
  setBridge,
  shapeAgeS,
  takeFrame,
  takeMessage,
} from "../../dashboard/stream/view-state.ts";
import { statusOf } from "../support/scene.ts";

const welcome = (runId: string): WelcomeMessage => ({
  type: "welcome",
  softwareVersion: "0.1.0",
  rigName: "Bench",
  bodyKind: "foil",
  lengthM: 0.5,
  widthM: null,
  rateHz: 100,
  sensors: [],
  pointCount: 3,
  source: { kind: "serial", label: "" },
  heading: "free",
  flowMPerS: null,
  runId,
});

function frameAt(hubTimeS: number, pointCount = 3): DataView {
  const frame = createDisplayFrame(pointCount, 1);
  frame.hubTimeS = hubTimeS;
  frame.midline[4] = hubTimeS;
  const bytes = new DataView(new ArrayBuffer(frameBytes(pointCount, 1)));
  encodeFrame(frame, bytes);
  return bytes;
}

test("frames of one run pile up; a new run starts with an empty past, the same run keeps it", () => {
  const view = createViewState();
  takeMessage(view, welcome("a"));
  for (const t of [1, 2, 3]) expect(takeFrame(view, frameAt(t), 0)).toBe(true);
  expect(view.past.total).toBe(3);
  expect(view.past.sideways(2, 1)).toBe(3);
  takeMessage(view, welcome("a"));
  expect(view.past.total).toBe(3);
  takeMessage(view, welcome("b"));
  expect([view.past.total, view.runFrameCount, view.frameCount]).toEqual([0, 0, 3]);
});

test("a clock that jumps back clears the past", () => {
  const view = createViewState();
  takeFrame(view, frameAt(100), 0);
  takeFrame(view, frameAt(1), 0);
  expect(view.past.total).toBe(1);
  expect(view.past.newestS).toBe(1);
});

test("frames are decoded into the same arrays as long as the counts stay", () => {
  const view = createViewState();
  takeFrame(view, frameAt(1), 0);
  const { midline } = view.frame;
  takeFrame(view, frameAt(2), 0);
  expect(view.frame.midline).toBe(midline);
  takeFrame(view, frameAt(3, 5), 0);
  expect(view.past.pointCount).toBe(5);
});

test("bytes that are no frame are refused and change nothing", () => {
  const view = createViewState();
  expect(takeFrame(view, new DataView(new ArrayBuffer(10)), 0)).toBe(false);
  expect([view.frameCount, view.past.total]).toEqual([0, 0]);
});

test("every message and every change of the bridge asks for the text to be drawn; a repeated state does not", () => {
  const view = createViewState();
  takeMessage(view, welcome("a"));
  takeMessage(view, { type: "marks", marks: [] });
  setBridge(view, "connected");
  expect(view.textRevision).toBe(3);
  setBridge(view, "connected");
  expect(view.textRevision).toBe(3);
});

test("each refusal can be told from the one before, though the reason is the same", () => {
  const view = createViewState();
  takeMessage(view, { type: "refusal", reason: "too many" });
  const first = view.refusal;
  takeMessage(view, { type: "refusal", reason: "too many" });
  expect(view.refusal).toEqual(first);
  expect(view.refusal).not.toBe(first);
});

test("our own connection is told before what the bridge last said of its link", () => {
  const view = createViewState();
  setBridge(view, "connected");
  expect(linkWord(view)).toBe("connecting");
  takeMessage(view, statusOf("flowing"));
  expect([linkWord(view), isLive(view)]).toEqual(["flowing", true]);
  takeMessage(view, statusOf("silent"));
  expect([linkWord(view), isLive(view)]).toEqual(["silent", false]);
  takeMessage(view, statusOf("flowing"));
  for (const bridge of ["connecting", "gone", "refused", "other version"] as const) {
    setBridge(view, bridge);
    expect([linkWord(view), isLive(view)]).toEqual([bridge, false]);
  }
});

test("trust words stand in the order of the trust bytes", () => {
  const words = Object.keys(TRUST).map((key) => key.toLowerCase().replaceAll("_", " "));
  expect(TRUST_WORDS).toEqual(words);
  expect(Object.values(TRUST)).toEqual(words.map((_, i) => i));
});

test("while a live link is silent hub time goes on by what has passed; once the run has ended it stands", () => {
  const view = createViewState();
  setBridge(view, "connected");
  takeFrame(view, frameAt(20), 1000);
  takeMessage(view, { ...statusOf("flowing"), hubTimeS: 20, behindMs: 5 });
  expect(hubTimeNow(view, 1500)).toBe(20);
  takeMessage(view, { ...statusOf("silent"), hubTimeS: 20, behindMs: 400 });
  expect(hubTimeNow(view, 3000)).toBe(22);
  takeMessage(view, { ...statusOf("ended"), hubTimeS: 20, behindMs: 9000 });
  expect(hubTimeNow(view, 3000)).toBe(20);
});

test("a page opened during a silence takes the shape's age from the bridge", () => {
  const view = createViewState();
  takeFrame(view, frameAt(20), 1000);
  takeMessage(view, { ...statusOf("silent"), hubTimeS: 20, behindMs: 30_000 });
  expect(shapeAgeS(view, 2000)).toBe(30);
});
