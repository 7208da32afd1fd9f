import { expect, test } from "vitest";
import { createDisplayFrame, encodeFrame, frameBytes } from "../../bridge/wire/frame.ts";
import type { BridgeMessage, WelcomeMessage } from "../../bridge/wire/messages.ts";
import { ViewState } from "../../dashboard/stream/view-state.ts";
import { healthyScene } from "../support/scene.ts";

function frameAt(hubTimeS: number, points = 4, sensors = 2): ArrayBuffer {
  const frame = createDisplayFrame(points, sensors);
  frame.hubTimeS = hubTimeS;
  frame.midline.fill(hubTimeS);
  const bytes = new ArrayBuffer(frameBytes(points, sensors));
  encodeFrame(frame, new DataView(bytes));
  return bytes;
}

function welcome(runId: string): WelcomeMessage {
  const { rigName, bodyKind, lengthM, widthM, rateHz, sensors, source, heading } = healthyScene(2);
  const rig = { rigName, bodyKind, lengthM, widthM, rateHz, sensors, source, heading };
  return { type: "welcome", softwareVersion: "0", ...rig, pointCount: 4, flowMPerS: null, runId };
}

const strip: BridgeMessage = { type: "strip", startS: 0, columnS: 1, lowM: [0], highM: [1] };

test("frames fill the past, in their order", () => {
  const view = new ViewState();
  view.takeMessage(welcome("a"));
  for (const timeS of [1, 2, 3]) expect(view.takeFrame(frameAt(timeS), 0)).toBe(true);
  expect(view.hasFrame).toBe(true);
  expect(view.frame.hubTimeS).toBe(3);
  expect([0, 1, 2].map((i) => view.history.lateral(i, 0))).toEqual([1, 2, 3]);
});

test("bytes that are no frame of this version change nothing", () => {
  const view = new ViewState();
  view.takeFrame(frameAt(1), 0);
  const other = frameAt(2);
  new DataView(other).setUint8(2, 99);
  for (const bytes of [other, new ArrayBuffer(0), frameAt(2).slice(0, 60)]) {
    expect(view.takeFrame(bytes, 0)).toBe(false);
  }
  expect(view.frame.hubTimeS).toBe(1);
  expect(view.history.count).toBe(1);
});

test("a new run forgets the past; the same run, met again after a lost connection, keeps it", () => {
  const view = new ViewState();
  view.takeMessage(welcome("a"));
  view.takeFrame(frameAt(1), 0);
  view.takeMessage(strip);
  const { run } = view;
  view.takeMessage(welcome("a"));
  expect([view.run, view.hasFrame, view.history.count]).toEqual([run, true, 1]);
  view.takeMessage(welcome("b"));
  expect([view.run, view.hasFrame, view.history.count, view.strip]).toEqual([run + 1, false, 0, null]);
});

test("another number of points starts the past anew: rows of two lengths never mix", () => {
  const view = new ViewState();
  view.takeFrame(frameAt(1, 4), 0);
  view.takeFrame(frameAt(2, 7), 0);
  expect([view.history.pointCount, view.history.count]).toEqual([7, 1]);
});

test("every message and every change of connection asks for the panels to be drawn; a repeated state does not", () => {
  const view = new ViewState();
  view.takeMessage(welcome("a"));
  view.takeMessage(strip);
  view.setConnection("connected");
  expect(view.revision).toBe(3);
  view.setConnection("connected");
  expect(view.revision).toBe(3);
});
