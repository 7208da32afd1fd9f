import { expect, test } from "vitest";
import { BendwatchError } from "../../bridge/errors.ts";
import { compileLayout } from "../../bridge/link/declared-compile.ts";
import { packetLayoutSchema } from "../../bridge/rig/packet-layout.ts";

const gyro = { what: "gyro", sensor: 0, at: 0, type: "i16", unit: "rad/s" };
const lineGyro = { what: "gyro", sensor: 0, at: 0, unit: "rad/s" };
const COBS = { kind: "cobs", maxBytes: 64 };
const LINE = { kind: "line" };

/** What compiling a layout of one packet, for three sensors, complains of. */
function problems(framing: object, packet: object, rest: object = {}): readonly string[] {
  const layout = packetLayoutSchema.parse({
    name: "L",
    framing,
    packets: [{ name: "one", ...packet }],
    ...rest,
  });
  try {
    compileLayout(layout, 3);
  } catch (error) {
    expect(error).toBeInstanceOf(BendwatchError);
    expect((error as BendwatchError).code).toBe("CONFIG_INVALID");
    return (error as BendwatchError).details.map((d) => `${d.where}: ${d.found}; ${d.expected}`);
  }
  return [];
}

test("a layout that holds together has no problems", () => {
  expect(problems(COBS, { fields: [gyro] })).toEqual([]);
  expect(problems(LINE, { fields: [lineGyro] })).toEqual([]);
});

test.each<[string, object, object, string]>([
  [
    "a binary field without a type",
    COBS,
    { fields: [{ ...gyro, type: undefined }] },
    "fields[0].type: nothing; a number format",
  ],
  [
    "a column with a type",
    LINE,
    { fields: [gyro] },
    'fields[0].type: "i16"; no type: lines hold decimal numbers',
  ],
  [
    "an axis missing",
    COBS,
    { fields: [{ ...gyro, axes: ["x", "y"] }] },
    "gyro of sensor 0: axes x y; each of x y z once",
  ],
  [
    "an axis twice",
    COBS,
    { fields: [gyro, { ...gyro, at: 6, axes: ["x"] }] },
    "gyro of sensor 0: axes x x y z; each of x y z once",
  ],
  [
    "each without a stride",
    COBS,
    { fields: [{ ...gyro, sensor: "each" }] },
    "fields[0].stride: nothing; how far sensors are apart",
  ],
  [
    "a stride for one sensor",
    COBS,
    { fields: [{ ...gyro, stride: 6 }] },
    'fields[0].stride: 6; none: only sensor "each" has one',
  ],
  [
    "a sensor the rig has not",
    COBS,
    { fields: [{ ...gyro, sensor: 3 }] },
    "fields[0].sensor: 3; a sensor of the rig, 0 to 2",
  ],
  [
    "a given sensor that nothing gives",
    COBS,
    { fields: [{ ...gyro, sensor: "given" }] },
    'fields[0].sensor: "given"; a sensorIndex field in the packet',
  ],
  [
    "two ticks",
    COBS,
    { fields: [1, 2].map((at) => ({ what: "tick", at, type: "u8", unit: "s" })) },
    'fields[1].what: a second "tick"; one in a packet',
  ],
  [
    "two sensor numbers for three sensors",
    COBS,
    { fields: [{ what: "sensorIndex", at: 0, type: "u8", numbers: [1, 2] }] },
    "fields[0].numbers: [1,2]; 3 different numbers, one a sensor",
  ],
  [
    "gathering by a tick it has not",
    COBS,
    { gather: "tick", fields: [gyro] },
    'gather: "tick"; a tick field in the packet',
  ],
  [
    "gathering no readings",
    COBS,
    { gather: "tick", fields: [{ what: "tick", at: 0, type: "u8", unit: "s" }] },
    'gather: "tick"; readings of a sensor in the packet',
  ],
  [
    "fields past the longest frame",
    COBS,
    { fields: [{ ...gyro, at: 60 }] },
    "fields that need 66 bytes; no more than 64",
  ],
  [
    "fields past the packet's own length",
    COBS,
    { bytes: 5, fields: [gyro] },
    "fields that need 6 bytes; no more than 5",
  ],
  [
    "columns past the line's own length",
    LINE,
    { bytes: 2, fields: [lineGyro] },
    "fields that need 3 columns; no more than 2",
  ],
  [
    "a packet of another length than the frames",
    { kind: "fixed", bytes: 8, syncHex: "AA" },
    { bytes: 9, fields: [gyro] },
    "bytes: 9; 8, as in framing, or nothing",
  ],
  [
    "a text as id of a binary packet",
    COBS,
    { id: { at: 0, type: "u8", equals: "A" } },
    'id.equals: "A"; a number: only lines have texts',
  ],
])("found: %s", (_title, framing, packet, expected) => {
  expect(problems(framing, packet).some((text) => text.includes(expected))).toBe(true);
});

test.each<[string, object, string]>([
  [
    "nothing to find frames by",
    { kind: "fixed", bytes: 8 },
    "framing: neither syncHex nor a checksum; one of them",
  ],
  [
    "a sync word longer than the frame",
    { kind: "fixed", bytes: 4, syncHex: "0102030405" },
    "framing.bytes: 4; room for the 5 sync bytes",
  ],
  [
    "a length inside the sync word",
    { kind: "syncLength", syncHex: "AA55", lengthAt: 1, lengthType: "u8", lengthAdds: 0 },
    "framing.lengthAt: 1; a place behind the 2 sync bytes",
  ],
  [
    "a length past the longest frame",
    { kind: "syncLength", syncHex: "AA55", lengthAt: 9, lengthType: "u16", lengthAdds: 0, maxBytes: 10 },
    "framing.lengthAt: 9; a place inside the 10 of maxBytes",
  ],
])("found in the framing: %s", (_title, framing, expected) => {
  const [problem] = problems(framing, {});
  expect(problem).toContain(expected);
});

test("long frames need a sync word", () => {
  const checksum = { kind: "sum8" };
  expect(problems({ kind: "fixed", bytes: 1024 }, {}, { checksum })).toEqual([]);
  expect(problems({ kind: "fixed", bytes: 1025 }, {}, { checksum })).toEqual([
    'layout "L", framing.bytes: 1025; at most 1024, or a syncHex',
  ]);
});

test("the checksum takes its room at the end of binary frames, and none among columns", () => {
  const checksum = { kind: "CRC-32/ISO-HDLC", trailingBytes: 1 };
  expect(problems({ kind: "cobs", maxBytes: 11 }, { fields: [gyro] }, { checksum })).toEqual([]);
  expect(problems({ kind: "cobs", maxBytes: 10 }, { fields: [gyro] }, { checksum })).toHaveLength(1);
  expect(problems(LINE, { bytes: 3, fields: [lineGyro] }, { checksum })).toEqual([]);
});

test("everything wrong is reported at once, by place in the layout", () => {
  const packet = { gather: "sequence", fields: [{ ...gyro, sensor: 5, axes: ["x"] }] };
  expect(problems(COBS, packet)).toEqual([
    'layout "L", packets[0].fields[0].sensor: 5; a sensor of the rig, 0 to 2',
    'layout "L", packets[0]: gyro of sensor 5: axes x; each of x y z once',
    'layout "L", packets[0].gather: "sequence"; a sequence field in the packet',
  ]);
});
