import { EventEmitter } from "node:events";
import { afterEach, beforeEach, describe, expect, it, vi } from "vitest";
import { BendwatchError } from "../../bridge/errors.ts";
import type { SerialDevice } from "../../bridge/link/port-watch.ts";
import type { PortChoice } from "../../bridge/link/ports.ts";
import { SerialSource } from "../../bridge/link/serial-source.ts";
import { ByteLog } from "../support/byte-log.ts";

type Done = (error: Error | null) => void;

/** A machine with USB sockets: which path each USB serial number has now, and every device that was opened. */
class Machine {
  readonly plugged = new Map<string, string>();
  readonly devices: FakeDevice[] = [];
  finds = 0;
  /** How devices answer; a test replaces them. */
  onOpen: (done: Done) => void = (done) => done(null);
  onDrain: (done: Done) => void = (done) => done(null);

  get newest(): FakeDevice {
    return this.devices.at(-1)!;
  }

  find = async ({ path, usbSerialNumber }: PortChoice): Promise<string> => {
    this.finds++;
    const found = path === undefined ? this.plugged.get(usbSerialNumber!) : path;
    if (found !== undefined && [...this.plugged.values()].includes(found)) return found;
    throw new BendwatchError("PORT_NOT_FOUND", { where: "", found: "", expected: "" });
  };

  create = (path: string): SerialDevice => {
    this.devices.push(new FakeDevice(path, this));
    return this.newest;
  };
}

class FakeDevice extends EventEmitter implements SerialDevice {
  isOpen = false;
  readonly path: string;
  readonly #machine: Machine;

  constructor(path: string, machine: Machine) {
    super();
    this.path = path;
    this.#machine = machine;
  }

  open(done: Done): void {
    this.#machine.onOpen((error) => {
      this.isOpen = error === null;
      done(error);
    });
  }

  close(done: Done): void {
    this.isOpen = false;
    done(null);
  }

  drain(done: Done): void {
    this.#machine.onDrain(done);
  }

  send(text: string): void {
    this.emit("data", Buffer.from(text));
  }

  /** As a driver does that notices. */
  drop(): void {
    this.isOpen = false;
    this.emit("close", new Error("disconnected"));
  }
}

let machine = new Machine();
let log = new ByteLog();
let source: SerialSource;

function start(port: PortChoice = { path: "A" }): void {
  source = new SerialSource({ port, baudRate: 921_600, find: machine.find, create: machine.create });
  void source.run(log);
}

const pass = (ms: number) => vi.advanceTimersByTimeAsync(ms);

beforeEach(() => {
  vi.useFakeTimers({ now: 1_700_000_000_000 });
  machine = new Machine();
  machine.plugged.set("serial 1", "A");
  log = new ByteLog();
});

afterEach(async () => {
  await source.stop();
  expect(vi.getTimerCount(), "timers left").toBe(0);
  expect(machine.devices.filter((device) => device.isOpen)).toEqual([]);
  vi.useRealTimers();
});

describe("a port that is there", () => {
  it("is opened, and its bytes come stamped with their arrival", async () => {
    start();
    await pass(0);
    expect(log.states).toEqual(["opening", "open"]);
    expect(log.details[1]).toBe("Reading A at 921600 baud.");
    await pass(123);
    machine.newest.send("hello");
    expect(log.received.toString()).toBe("hello");
    expect(log.times.at(-1)).toBe(1_700_000_000_123);
  });

  it("stays open however long it is silent, and is told so once", async () => {
    start();
    await pass(60_000);
    expect(log.states).toEqual(["opening", "open"]);
    expect(machine.devices).toHaveLength(1);
  });

  it("is not asked anything while bytes come", async () => {
    start();
    await pass(0);
    for (let i = 0; i < 50; i++) {
      machine.newest.send("x");
      await pass(100);
    }
    expect(machine.finds).toBe(1);
  });
});

describe("a port that is not there", () => {
  it("is waited for: said once, tried with growing pauses, opened when it comes", async () => {
    machine.plugged.clear();
    start();
    await pass(20_000);
    expect(log.states).toEqual(["opening", "opening"]);
    expect(log.details[1]).toBe("No port A yet; trying again. `bendwatch ports` lists what is connected.");
    // 0, 0.5, 1.25, 2.375, 4.06 s, then every 2 s.
    expect(machine.finds).toBe(12);
    machine.plugged.set("serial 1", "A");
    await pass(2000);
    expect(log.states).toEqual(["opening", "opening", "open"]);
  });

  it("is told apart from one that cannot be opened, with the likely reason", async () => {
    machine.onOpen = (done) => done(new Error("Error: Permission denied, cannot open A"));
    start();
    await pass(5000);
    expect(log.states).toEqual(["opening", "opening"]);
    expect(log.details[1]).toBe(
      "Cannot open A: Permission denied, cannot open A. On Linux, join the group that owns it, often dialout. Trying again.",
    );
    machine.onOpen = (done) => done(null);
    await pass(2000);
    expect(log.states.at(-1)).toBe("open");
  });

  it("is no reason to end when the ports cannot even be listed", async () => {
    const { find } = machine;
    machine.find = () => Promise.reject(new Error("no such service"));
    source = new SerialSource({
      port: { usbSerialNumber: "serial 1" },
      baudRate: 9600,
      find: (choice) => machine.find(choice),
      create: machine.create,
    });
    void source.run(log);
    await pass(100);
    expect(log.details.at(-1)).toBe("Cannot list the ports: no such service. Trying again.");
    machine.find = find;
    await pass(2000);
    expect(log.states.at(-1)).toBe("open");
  });
});

describe("a port that is lost", () => {
  it("is opened again by itself, with one closed state between", async () => {
    start();
    await pass(0);
    machine.plugged.clear();
    machine.newest.drop();
    await pass(10_000);
    expect(log.states).toEqual(["opening", "open", "closed"]);
    expect(log.details[2]).toBe("Lost A: unplugged or switched off. Trying again until it is back.");
    machine.plugged.set("serial 1", "A");
    await pass(2000);
    machine.newest.send("back");
    expect(log.states).toEqual(["opening", "open", "closed", "open"]);
    expect(log.received.toString()).toBe("back");
  });

  it("is noticed without a close event: the path has gone", async () => {
    start();
    await pass(0);
    machine.newest.send("x");
    machine.plugged.clear();
    await pass(999);
    expect(log.states.at(-1)).toBe("open");
    await pass(1);
    expect(log.states.at(-1)).toBe("closed");
    expect(machine.newest.isOpen).toBe(false);
  });

  it("is noticed without a close event: the path is back already, but the handle is dead", async () => {
    start();
    await pass(0);
    machine.onDrain = (done) => done(new Error("Input/output error"));
    await pass(1400);
    expect(log.states.at(-1)).toBe("closed");
    machine.onDrain = (done) => done(null);
    await pass(2000);
    expect(log.states.at(-1)).toBe("open");
    expect(machine.devices).toHaveLength(2);
  });

  it("is noticed without a close event: the device says itself that it is not open", async () => {
    start();
    await pass(0);
    machine.newest.isOpen = false;
    await pass(1400);
    expect(log.states).toEqual(["opening", "open", "closed"]);
  });

  it("is found under another path by its USB serial number", async () => {
    start({ usbSerialNumber: "serial 1" });
    await pass(0);
    machine.plugged.set("serial 1", "B");
    await pass(2500);
    expect(machine.devices.map((device) => device.path)).toEqual(["A", "B"]);
    expect(log.states).toEqual(["opening", "open", "closed", "open"]);
    expect(log.details.at(-1)).toContain("Reading B");
  });

  it("still delivers bytes that were on their way when it closed", async () => {
    start();
    await pass(0);
    const device = machine.newest;
    device.drop();
    await pass(0);
    device.send("last words");
    expect(log.received.toString()).toBe("last words");
  });
});

describe("a port that neither speaks nor answers", () => {
  it("is opened anew after five seconds, once, and again only after bytes came", async () => {
    machine.onDrain = () => {};
    start();
    await pass(5400);
    expect(log.details.at(-1)).toBe("A does not answer; opening it again.");
    await pass(60_000);
    expect(machine.devices).toHaveLength(2);
    expect(log.states.at(-1)).toBe("open");
    machine.newest.send("x");
    await pass(60_000);
    expect(machine.devices).toHaveLength(3);
  });
});

describe("stop", () => {
  it("while opening waits for the port and closes it, without calling it open", async () => {
    let opened: Done = () => {};
    machine.onOpen = (done) => {
      opened = done;
    };
    start();
    await pass(0);
    const stopped = source.stop();
    opened(null);
    await stopped;
    expect(machine.newest.isOpen).toBe(false);
    expect(log.states).toEqual(["opening", "ended"]);
  });

  it("ends the run at once, waiting for a port or reading one, and nothing is delivered after", async () => {
    for (const plugged of [false, true]) {
      log = new ByteLog();
      machine.plugged.clear();
      if (plugged) machine.plugged.set("serial 1", "A");
      start();
      await pass(700);
      await source.stop();
      expect(log.states.at(-1)).toBe("ended");
    }
    machine.newest.send("too late");
    expect(log.received).toHaveLength(0);
  });
});
