import { expect, test } from "vitest";
import { OutPort } from "../../bridge/rehearsal/out-port.ts";

/** 1000 bytes a second. */
const BAUD = 10_000;
const bytes = (count: number, first = 0) => Uint8Array.from({ length: count }, (_, i) => first + i);

test("bytes leave in order at the baud rate, from the moment they were put", () => {
  const port = new OutPort(BAUD);
  port.put(1, bytes(10));
  expect([...port.take(1.0045)]).toEqual([0, 1, 2, 3]);
  port.put(1.005, bytes(2, 100));
  expect([...port.take(1.1)]).toEqual([4, 5, 6, 7, 8, 9, 100, 101]);
});

test("time in which nothing was held is not made up for", () => {
  const port = new OutPort(BAUD);
  port.put(0, bytes(2));
  port.put(5, bytes(3, 50));
  expect([...port.take(5.0015)]).toEqual([0, 1, 50]);
});

test("a packet that does not fit is refused whole, and there is room again later", () => {
  const port = new OutPort(BAUD);
  const packet = bytes(10_000);
  expect(port.put(0, packet)).toBe(true);
  expect(port.put(0, packet)).toBe(false);
  expect(port.put(4, packet)).toBe(true);
  expect(port.take(4).length).toBe(4000);
});
