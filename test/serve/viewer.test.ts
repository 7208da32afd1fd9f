import { expect, test } from "vitest";
import type { WebSocket } from "ws";
import { VIEWER_QUEUE_BYTES, Viewer } from "../../bridge/serve/viewer.ts";

/** A socket whose network never drains unless told to: what it was given, and how much still waits. */
function stalledSocket() {
  const sent: (string | Uint8Array)[] = [];
  const socket = {
    OPEN: 1,
    readyState: 1,
    bufferedAmount: 0,
    send(data: string | Uint8Array) {
      sent.push(data);
      socket.bufferedAmount += data.length;
    },
  };
  return { socket, sent, viewer: new Viewer(socket as unknown as WebSocket) };
}

test("a stalled viewer loses frames and the bytes waiting for it never pass the limit", () => {
  const { socket, sent, viewer } = stalledSocket();
  const frame = new Uint8Array(1000);
  for (let i = 0; i < 10_000; i++) viewer.offerFrame(frame);
  expect(socket.bufferedAmount).toBeLessThanOrEqual(VIEWER_QUEUE_BYTES);
  expect(viewer.framesSkipped).toBe(10_000 - sent.length);
  expect(sent.length).toBe(Math.floor(VIEWER_QUEUE_BYTES / 1000));
});

test("frames are copied: the caller may reuse its buffer at once", () => {
  const { sent, viewer } = stalledSocket();
  const frame = new Uint8Array([1, 2, 3]);
  viewer.offerFrame(frame);
  frame.fill(9);
  expect([...(sent[0] as Uint8Array)]).toEqual([1, 2, 3]);
});

test("of the text that waits for a stalled viewer only the newest of each type is sent, once it has caught up", () => {
  const { socket, sent, viewer } = stalledSocket();
  socket.bufferedAmount = VIEWER_QUEUE_BYTES;
  for (let i = 0; i < 100; i++) viewer.offerText("status", `status ${i}`);
  viewer.offerText("flags", "flags 1");
  expect(sent).toEqual([]);
  socket.bufferedAmount = 0;
  viewer.flush();
  expect(sent).toEqual(["status 99", "flags 1"]);
});

test("a message longer than the limit still goes out, on an empty queue", () => {
  const { sent, viewer } = stalledSocket();
  const long = "x".repeat(VIEWER_QUEUE_BYTES * 2);
  viewer.offerText("strip", long);
  viewer.offerText("status", "waits");
  expect(sent).toEqual([long]);
});

test("nothing is sent to a socket that is closing", () => {
  const { socket, sent, viewer } = stalledSocket();
  socket.readyState = 2;
  viewer.offerFrame(new Uint8Array(1));
  viewer.offerText("status", "late");
  expect(sent).toEqual([]);
});
