/** The serial ports of this machine: listing, describing and finding them. */
import { access, readdir, readFile, realpath } from "node:fs/promises";
import { dirname, join } from "node:path";
import { SerialPort } from "serialport";
import { BendwatchError } from "../errors.ts";

export interface PortEntry {
  /** What opens it: /dev/ttyACM0, COM5. */
  readonly path: string;
  /** Of the adapter, null where the port is not on USB or the adapter has none. */
  readonly usbSerialNumber: string | null;
  readonly manufacturer: string | null;
  /** USB vendor and product, four hexadecimal digits each. */
  readonly vendorId: string | null;
  readonly productId: string | null;
}

/** Which port is meant: by path, or by the adapter's USB serial number, which stays when the path changes. */
export interface PortChoice {
  readonly path?: string | undefined;
  readonly usbSerialNumber?: string | undefined;
}

type ListPorts = () => Promise<PortEntry[]>;

/** The ports connected now, USB adapters first. */
export async function listPorts(): Promise<PortEntry[]> {
  const ports =
    process.platform === "linux" ? await listLinuxPorts("/sys/class/tty") : await listOtherPorts();
  const rank = (port: PortEntry) => (port.vendorId === null ? 1 : 0);
  return ports.sort((a, b) => rank(a) - rank(b) || a.path.localeCompare(b.path, "en", { numeric: true }));
}

/**
 * The path of the port that is meant. Several ports of one adapter have one serial number: the first is taken.
 * @throws (rejects) BendwatchError PORT_NOT_FOUND while it is not connected
 */
export async function findPort(choice: PortChoice, list: ListPorts = listPorts): Promise<string> {
  const { path, usbSerialNumber } = choice;
  if (path !== undefined) {
    if (await isPresent(path, list)) return path;
    throw new BendwatchError("PORT_NOT_FOUND", {
      where: `port ${path}`,
      found: "nothing",
      expected: "a serial port",
    });
  }
  const ports = await list();
  const port = ports.find((p) => usbSerialNumber !== undefined && p.usbSerialNumber === usbSerialNumber);
  if (port !== undefined) return port.path;
  const others = ports.flatMap((p) => p.usbSerialNumber ?? []);
  throw new BendwatchError("PORT_NOT_FOUND", {
    where: "USB serial number",
    found: others.length > 0 ? others.join(", ") : "no USB serial port",
    expected: usbSerialNumber ?? "a path or a USB serial number",
  });
}

/** Where ports are files, a file may be a link of the operator's own that no list shows. */
async function isPresent(path: string, list: ListPorts): Promise<boolean> {
  if (process.platform === "win32") {
    return (await list()).some((port) => port.path.toUpperCase() === path.toUpperCase());
  }
  return access(path).then(
    () => true,
    () => false,
  );
}

/** A text table of ports for the terminal, or what to do when there are none. */
export function describePorts(ports: readonly PortEntry[]): string {
  if (ports.length === 0) {
    return [
      "No serial ports found.",
      "Plug in the hub or its adapter, wait two seconds and run `bendwatch ports` again.",
      "If it still is not listed: try another cable (some only charge), or install the adapter's driver.",
    ].join("\n");
  }
  const rows = [
    ["port", "USB serial number", "manufacturer", "vendor:product"],
    ...ports.map((port) => [
      port.path,
      port.usbSerialNumber ?? "-",
      port.manufacturer ?? "-",
      port.vendorId === null ? "-" : `${port.vendorId}:${port.productId ?? "?"}`,
    ]),
  ];
  const widths = rows[0]!.map((_, column) => Math.max(...rows.map((row) => row[column]!.length)));
  const lines = rows.map((row) =>
    row
      .map((cell, column) => cell.padEnd(widths[column]!))
      .join("  ")
      .trimEnd(),
  );
  return [
    ...lines,
    "",
    "Use one with --port <port> or --usb-serial <number>, or set hub.port in the rig file.",
  ].join("\n");
}

async function listOtherPorts(): Promise<PortEntry[]> {
  const ports = await SerialPort.list();
  return ports.map((port) => ({
    path: port.path,
    usbSerialNumber: port.serialNumber || null,
    manufacturer: port.manufacturer || null,
    vendorId: port.vendorId?.toLowerCase() ?? null,
    productId: port.productId?.toLowerCase() ?? null,
  }));
}

/**
 * Linux tells all there is to know in files; asking the udev tool, as the serialport package does, takes a process each
 * time and fails where it is not installed. A terminal with a `device` is a port of some hardware; a built-in one whose
 * `type` is 0 has no chip behind it. The USB device is one of the folders above.
 * @param folder /sys/class/tty
 */
export async function listLinuxPorts(folder: string): Promise<PortEntry[]> {
  const names = await readdir(folder).catch(() => []);
  const ports = await Promise.all(names.map((name) => linuxPort(join(folder, name), name)));
  return ports.filter((port) => port !== null);
}

async function linuxPort(folder: string, name: string): Promise<PortEntry | null> {
  const device = await realpath(join(folder, "device")).catch(() => null);
  if (device === null || (await textOf(join(folder, "type"))) === "0") return null;
  const usb = await usbDeviceAbove(device);
  const about = (key: string) => (usb === null ? null : textOf(join(usb, key)));
  return {
    path: `/dev/${name}`,
    usbSerialNumber: await about("serial"),
    manufacturer: await about("manufacturer"),
    vendorId: await about("idVendor"),
    productId: await about("idProduct"),
  };
}

/** A USB port's device lies one or two folders below its USB device. */
async function usbDeviceAbove(device: string): Promise<string | null> {
  for (const folder of [dirname(device), dirname(dirname(device))]) {
    if ((await textOf(join(folder, "idVendor"))) !== null) return folder;
  }
  return null;
}

async function textOf(file: string): Promise<string | null> {
  const text = await readFile(file, "utf8").catch(() => "");
  return text.trim() || null;
}
