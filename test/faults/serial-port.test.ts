/** A serial port on a real pseudo-terminal: nothing lost or altered, unplugged and plugged in again. */
import { createHash, randomBytes } from "node:crypto";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { findPort, type PortChoice } from "../../bridge/link/ports.ts";
import { SerialSource } from "../../bridge/link/serial-source.ts";
import { ByteLog } from "../support/byte-log.ts";
import { openPty, type Pty } from "../support/pty.ts";

let pty: Pty;
let log: ByteLog;
let source: SerialSource;
let running: Promise<void>;
/** Resolves when the port has been looked for five times: to open it, and four times while open. */
let fifthFind: Promise<void>;

beforeEach(async () => {
  pty = await openPty();
  log = new ByteLog();
  let finds = 0;
  let resolveFifth = () => {};
  fifthFind = new Promise((resolve) => {
    resolveFifth = resolve;
  });
  const find = (choice: PortChoice) => {
    if (++finds === 5) resolveFifth();
    return findPort(choice);
  };
  source = new SerialSource({
    port: { path: pty.path },
    baudRate: 921_600,
    silenceMs: 40,
    retryMs: 10,
    find,
  });
  running = source.run(log);
  await log.until(({ states }) => states.at(-1) === "open");
});

afterEach(async () => {
  await source.stop();
  await running;
  pty.close();
});

const sha256 = (bytes: Uint8Array) => createHash("sha256").update(bytes).digest("hex");

describe("bytes", () => {
  it("of every value arrive unaltered: no control character means anything", async () => {
    const every = Uint8Array.from({ length: 256 }, (_, i) => i);
    await pty.write(every);
    await log.until(({ received }) => received.length >= 256);
    expect([...log.received]).toEqual([...every]);
  });

  it("arrive complete: a million random ones, in pieces of 1 to 9000", async () => {
    const sent = randomBytes(1_000_000);
    for (let at = 0, size = 1; at < sent.length; at += size, size = (size * 7) % 9001) {
      await pty.write(sent.subarray(at, at + size));
    }
    await log.until(({ received }) => received.length >= sent.length);
    expect(log.received.length).toBe(sent.length);
    expect(sha256(log.received)).toBe(sha256(sent));
  });

  it("of text lines keep their line ends", async () => {
    const lines = "1,5000,0.1,-0.2\r\n2,10000,0.1,-0.2\n";
    await pty.write(lines);
    await log.until(({ received }) => received.length >= lines.length);
    expect(log.received.toString()).toBe(lines);
  });
});

describe("the cable", () => {
  it("pulled and put back under the same path: closed, then open again, and bytes flow", async () => {
    await pty.write("before");
    await log.until(({ received }) => received.length === 6);
    for (const round of [1, 2, 3]) {
      pty.unplug();
      await log.until(({ states }) => states.at(-1) === "closed");
      pty.plugIn();
      await log.until(({ states }) => states.at(-1) === "open");
      await pty.write(`after ${round}`);
      await log.until(({ received }) => received.toString().endsWith(`after ${round}`));
    }
    expect(log.received.toString()).toBe("beforeafter 1after 2after 3");
    expect(log.states).toEqual(["opening", "open", "closed", "open", "closed", "open", "closed", "open"]);
  });

  it("in place but silent: the port is asked again and again, and stays open", async () => {
    await fifthFind;
    await pty.write("still here");
    await log.until(({ received }) => received.length === 10);
    expect(log.states).toEqual(["opening", "open"]);
  });
});

it("stops with the port closed: the next reader can open it", async () => {
  await source.stop();
  const other = new SerialSource({ port: { path: pty.path }, baudRate: 9600 });
  const otherLog = new ByteLog();
  const otherRun = other.run(otherLog);
  await otherLog.until(({ states }) => states.at(-1) === "open");
  await pty.write("x");
  await otherLog.until(({ received }) => received.length === 1);
  await other.stop();
  await otherRun;
  expect(log.received).toHaveLength(0);
});
