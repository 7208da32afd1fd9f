/** Reads the body of a native HELLO (layout in native.ts). About once a second: written to be clear, not to save memory. */
import { HEADER_BYTES, HELLO_SCALES_AT, MAX_SENSORS, SCALES_BYTES } from "./native.ts";
import type { HubHello, HubSensor } from "./packets.ts";

const utf8 = new TextDecoder();

/**
 * @param payload begins with the packet's header
 * @param end where the body ends
 * @returns null when the body does not hold together: wrong length, no or too many sensors, a scale that is no scale
 */
export function readHello(payload: Uint8Array, tickUs: number, end: number): HubHello | null {
  const view = new DataView(payload.buffer, payload.byteOffset, end);
  if (end < HELLO_SCALES_AT) return null;
  const count = view.getUint8(HEADER_BYTES);
  const stringsAt = HELLO_SCALES_AT + count * SCALES_BYTES;
  if (count < 1 || count > MAX_SENSORS || stringsAt > end) return null;
  const serials = readStrings(payload, stringsAt, end);
  if (serials?.length !== count + 1) return null;
  const sensors = Array.from({ length: count }, (_, i): HubSensor => {
    const at = HELLO_SCALES_AT + i * SCALES_BYTES;
    return {
      gyroScale: view.getFloat32(at, true),
      accelScale: view.getFloat32(at + 4, true),
      magScale: view.getFloat32(at + 8, true),
      serial: serials[i],
    };
  });
  if (!sensors.every((s) => isScale(s.gyroScale) && isScale(s.accelScale) && isScale(s.magScale)))
    return null;
  return {
    tickUs,
    rateHz: view.getUint32(HEADER_BYTES + 1, true) / 1000,
    hubSerial: serials[count],
    sensors,
  };
}

/** All strings from `at` to `end`, each a u8 length and UTF-8; null when the last one runs past the end. */
function readStrings(bytes: Uint8Array, at: number, end: number): string[] | null {
  const strings: string[] = [];
  for (let next = at; at < end; at = next) {
    next = at + 1 + bytes[at];
    if (next > end) return null;
    strings.push(utf8.decode(bytes.subarray(at + 1, next)));
  }
  return strings;
}

function isScale(value: number): boolean {
  return value >= 0 && value < Number.POSITIVE_INFINITY;
}
