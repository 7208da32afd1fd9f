import { mkdirSync, mkdtempSync, rmSync, symlinkSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { describePorts, findPort, listLinuxPorts, type PortEntry } from "../../bridge/link/ports.ts";

let folder = "";
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), "bendwatch-ports-"));
});
afterEach(() => rmSync(folder, { recursive: true }));

const hub: PortEntry = {
  path: "/dev/ttyACM0",
  usbSerialNumber: "FL-0042",
  manufacturer: "Flume Works",
  vendorId: "0123",
  productId: "abcd",
};
const builtIn: PortEntry = {
  path: "/dev/ttyS0",
  usbSerialNumber: null,
  manufacturer: null,
  vendorId: null,
  productId: null,
};

describe("finding a port", () => {
  it("gives a path that exists as it is, without listing", async () => {
    const path = join(folder, "port");
    writeFileSync(path, "");
    const list = () => Promise.reject(new Error("not to be asked"));
    expect(await findPort({ path }, list)).toBe(path);
  });

  it("gives the path that a USB serial number has now", async () => {
    expect(await findPort({ usbSerialNumber: "FL-0042" }, async () => [builtIn, hub])).toBe("/dev/ttyACM0");
  });

  it("says which path is missing, and what to do", async () => {
    const path = join(folder, "nothing");
    await expect(findPort({ path })).rejects.toMatchObject({
      code: "PORT_NOT_FOUND",
      message: expect.stringMatching(/nothing.*\n.*bendwatch ports/s),
    });
  });

  it("says which USB serial numbers there are instead", async () => {
    const finding = findPort({ usbSerialNumber: "FL-0007" }, async () => [builtIn, hub]);
    await expect(finding).rejects.toMatchObject({
      code: "PORT_NOT_FOUND",
      details: [{ found: "FL-0042", expected: "FL-0007" }],
    });
  });

  it("finds nothing, rather than a port without a number, when none is named", async () => {
    await expect(findPort({}, async () => [builtIn])).rejects.toMatchObject({ code: "PORT_NOT_FOUND" });
  });
});

describe("describing ports", () => {
  it("aligns the columns and says how to use a port", () => {
    const lines = describePorts([hub, builtIn]).split("\n");
    expect(lines.slice(0, 3)).toEqual([
      "port          USB serial number  manufacturer  vendor:product",
      "/dev/ttyACM0  FL-0042            Flume Works   0123:abcd",
      "/dev/ttyS0    -                  -             -",
    ]);
    expect(lines.at(-1)).toContain("--usb-serial");
  });

  it("says what to try when there are none", () => {
    expect(describePorts([])).toMatch(/^No serial ports found\.\n.*Plug in/);
  });
});

describe("listing on Linux", () => {
  /** A terminal as the kernel shows it: its folder, and the device it belongs to. */
  function terminal(name: string, device: string | null, type?: string): void {
    const own = join(folder, "class", name);
    mkdirSync(own, { recursive: true });
    if (type !== undefined) writeFileSync(join(own, "type"), `${type}\n`);
    if (device === null) return;
    mkdirSync(join(folder, device), { recursive: true });
    symlinkSync(join(folder, device), join(own, "device"));
  }

  function usbDevice(place: string, about: Record<string, string>): void {
    mkdirSync(join(folder, place), { recursive: true });
    for (const [key, text] of Object.entries(about)) writeFileSync(join(folder, place, key), `${text}\n`);
  }

  it("tells the USB device of a port, one folder up for a modem class port, two for an adapter", async () => {
    terminal("ttyACM0", "usb1/1-1/1-1:1.0");
    usbDevice("usb1/1-1", {
      idVendor: "0123",
      idProduct: "abcd",
      serial: "FL-0042",
      manufacturer: "Flume Works",
    });
    terminal("ttyUSB3", "usb1/1-2/1-2:1.0/ttyUSB3");
    usbDevice("usb1/1-2", { idVendor: "4567", idProduct: "89ab" });
    usbDevice("usb1", { idVendor: "ffff", serial: "root hub" });
    const ports = await listLinuxPorts(join(folder, "class"));
    expect(ports.sort((a, b) => a.path.localeCompare(b.path))).toEqual([
      hub,
      {
        path: "/dev/ttyUSB3",
        usbSerialNumber: null,
        manufacturer: null,
        vendorId: "4567",
        productId: "89ab",
      },
    ]);
  });

  it("leaves out terminals that are no ports, and built-in ports without a chip", async () => {
    terminal("tty1", null);
    terminal("ttyS0", "pnp0/00:00", "4");
    terminal("ttyS1", "platform/serial8250", "0");
    expect(await listLinuxPorts(join(folder, "class"))).toEqual([builtIn]);
  });

  it("finds none where the kernel shows none", async () => {
    expect(await listLinuxPorts(join(folder, "absent"))).toEqual([]);
  });
});
