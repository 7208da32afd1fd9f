/**
 * Declared packet layouts, config/layouts/<name>.json: somebody's existing packets described, so that a lab adapts the
 * monitor and not its firmware. A rig chooses one by `hub.layout`. What a layout needs beyond its keys being right (all
 * three axes, nothing past the packet's end) is checked when link/ compiles it for a rig.
 */
import { z } from "zod";
import { MICROTESLA_PER_GAUSS, RAD_PER_DEG, STANDARD_GRAVITY } from "../numeric/units.ts";

/** Parametrised CRC algorithms by their catalogue names; the parameters are in link/checksum.ts. */
export const CRC_NAMES = [
  "CRC-8/SMBUS",
  "CRC-16/ARC",
  "CRC-16/DNP",
  "CRC-16/IBM-3740",
  "CRC-16/IBM-SDLC",
  "CRC-16/KERMIT",
  "CRC-16/MODBUS",
  "CRC-16/XMODEM",
  "CRC-32/ISO-HDLC",
] as const;
export type CrcName = (typeof CRC_NAMES)[number];

/** What one of a unit is in the unit used inside (rad/s, m/s², µT, µs, V, °C, rad, m). */
export const UNITS = {
  gyro: { "rad/s": 1, "deg/s": RAD_PER_DEG },
  accel: { "m/s²": 1, "m/s2": 1, g: STANDARD_GRAVITY, mg: STANDARD_GRAVITY / 1000 },
  mag: { µT: 1, uT: 1, nT: 0.001, gauss: MICROTESLA_PER_GAUSS, mG: MICROTESLA_PER_GAUSS / 1000 },
  tick: { µs: 1, us: 1, ms: 1000, s: 1_000_000 },
  supply: { V: 1, mV: 0.001 },
  temperature: { "°C": 1, C: 1 },
  referenceYaw: { rad: 1, deg: RAD_PER_DEG },
  referenceSway: { m: 1, mm: 0.001 },
} as const;

function unitOf<K extends keyof typeof UNITS>(what: K) {
  const names = Object.keys(UNITS[what]) as [
    string & keyof (typeof UNITS)[K],
    ...(string & keyof (typeof UNITS)[K])[],
  ];
  return z.enum(names).describe("Unit of the value after scale and offset.");
}

const endian = z.enum(["little", "big"]);
const hexBytes = z
  .string()
  .regex(/^([0-9A-Fa-f]{2}){1,8}$/, "one to eight bytes in hexadecimal, e.g. AA55")
  .describe("Bytes every frame begins with.");
const maxBytes = z
  .number()
  .int()
  .min(4)
  .max(8192)
  .default(2048)
  .describe("Longest frame, coding taken off; anything longer is damage.");
const binaryType = z.enum(["u8", "i8", "u16", "i16", "u24", "i24", "u32", "i32", "u64", "f32", "f64"]);
const offsetInFrame = z.number().int().min(0).max(8191);

const framingSchema = z.discriminatedUnion("kind", [
  z.strictObject({ kind: z.literal("cobs"), maxBytes }).describe("COBS, each frame ended by 0x00."),
  z.strictObject({ kind: z.literal("slip"), maxBytes }).describe("SLIP, RFC 1055."),
  z
    .strictObject({
      kind: z.literal("syncLength"),
      syncHex: hexBytes,
      lengthAt: offsetInFrame.describe("Place of the length in the frame, counted from the first sync byte."),
      lengthType: z.enum(["u8", "u16"]).describe("Number format of the length."),
      lengthAdds: z
        .number()
        .int()
        .min(-65_535)
        .max(65_535)
        .describe(
          "Added to the length it gives all bytes of the frame, sync to checksum: 0 where the length counts them all; where it counts only a payload, the bytes of everything else.",
        ),
      maxBytes,
    })
    .describe("A sync word, and a length that says where the frame ends."),
  z
    .strictObject({
      kind: z.literal("fixed"),
      bytes: z.number().int().min(4).max(8192).describe("All bytes of every frame, sync to checksum."),
      syncHex: hexBytes.optional(),
    })
    .describe("Every frame has the same length; found by its sync word, its checksum, or both."),
  z
    .strictObject({
      kind: z.literal("line"),
      separator: z
        .enum([",", ";", "\t", "|", " "])
        .default(",")
        .describe("Between columns; a blank stands for any number of blanks."),
      maxBytes,
    })
    .describe("Lines of text ended by LF or CR LF; columns hold decimal numbers."),
]);

const checksumSchema = z
  .strictObject({
    kind: z
      .enum(["none", "sum8", "sum16", "xor8", ...CRC_NAMES])
      .describe("Sums and xor run over bytes; CRCs go by their catalogue names."),
    endian: endian.optional().describe("Byte order of the checksum; the layout's own if left out."),
    from: offsetInFrame
      .default(0)
      .describe("First byte it covers; it covers everything from there up to itself."),
    trailingBytes: z
      .number()
      .int()
      .min(0)
      .max(16)
      .default(0)
      .describe("Bytes after the checksum, not covered."),
    marker: z
      .string()
      .length(1)
      .default("*")
      .describe("Lines only: the character after the last column, followed by the checksum in hexadecimal."),
  })
  .describe("At the end of the frame.");

const place = {
  at: offsetInFrame.describe("First byte in the frame, counted from 0 (for lines: the column)."),
  type: binaryType.optional().describe("Number format; left out for lines, which hold decimal numbers."),
  endian: endian.optional().describe("The layout's own if left out."),
};
const sensor = {
  sensor: z
    .union([z.number().int().min(0).max(63), z.enum(["each", "given"])])
    .default("each")
    .describe(
      "Whose reading: a number counted from 0 at the nose; each: all of the rig's, `stride` apart; given: the one that the packet's sensorIndex names.",
    ),
  stride: z
    .number()
    .int()
    .min(1)
    .max(65_535)
    .optional()
    .describe("For each: bytes (columns) from one sensor's reading to the next one's."),
};
const scaled = {
  scale: z.number().default(1).describe("Multiplies the number sent."),
  offset: z.number().default(0).describe("Added after the scale, in the field's unit."),
};
const counter = {
  wrapsAt: z
    .number()
    .positive()
    .optional()
    .describe("The count starts over at this value; 2 to the power of its bits if left out."),
};
const missing = z.number().optional().describe("The number that stands for no reading, as sent.");
const axis = z.enum(["x", "y", "z", "-x", "-y", "-z"]);

function vector<K extends "gyro" | "accel" | "mag">(what: K) {
  return z.strictObject({
    what: z.literal(what),
    ...sensor,
    ...place,
    axes: z
      .array(axis)
      .min(1)
      .max(3)
      .default(["x", "y", "z"])
      .describe("The sensor axes in the order sent, one right after the other; -y turns the sign."),
    unit: unitOf(what),
    ...scaled,
    missing,
  });
}

const fieldSchema = z.discriminatedUnion("what", [
  vector("gyro"),
  vector("accel"),
  vector("mag"),
  z
    .strictObject({
      what: z.literal("quaternion"),
      ...sensor,
      ...place,
      axes: z
        .array(z.enum(["w", "x", "y", "z", "-w", "-x", "-y", "-z"]))
        .min(1)
        .max(4)
        .default(["w", "x", "y", "z"])
        .describe(
          "The parts in the order sent; one sent from earth to sensor has its x, y and z signs turned.",
        ),
      frame: z
        .enum(["enu", "ned"])
        .default("enu")
        .describe("Earth axes of the maker. enu: x east, y north, z up. ned: x north, y east, z down."),
      scale: scaled.scale,
      missing,
    })
    .describe("Fused on board: Hamilton, sensor to earth. The rig's mounting turns it into body axes."),
  z.strictObject({ what: z.literal("sequence"), ...place, ...counter }).describe("Counts sweeps."),
  z.strictObject({
    what: z.literal("tick"),
    ...place,
    unit: unitOf("tick"),
    scale: scaled.scale,
    ...counter,
  }),
  z
    .strictObject({
      what: z.literal("sensorIndex"),
      ...place,
      numbers: z
        .array(z.number().int())
        .min(1)
        .max(64)
        .optional()
        .describe("The number that stands for each sensor, nose to tail; 0, 1, 2 ... if left out."),
    })
    .describe("Whose packet this is, where each sensor has its own."),
  z
    .strictObject({ what: z.literal("readStatus"), ...sensor, ...place })
    .describe("0: the hub read this sensor without trouble."),
  z
    .strictObject({
      what: z.literal("presence"),
      ...place,
      parts: z
        .array(z.enum(["gyro", "accel", "mag", "quaternion"]))
        .min(1)
        .default(["gyro", "accel", "mag", "quaternion"])
        .describe("What the bits speak of."),
      firstSensor: z.number().int().min(0).max(63).default(0).describe("The sensor of the lowest bit."),
    })
    .describe("One bit a sensor, lowest first: its reading is in this packet."),
  z.strictObject({ what: z.literal("supply"), ...place, unit: unitOf("supply"), ...scaled }),
  z.strictObject({ what: z.literal("temperature"), ...place, unit: unitOf("temperature"), ...scaled }),
  z
    .strictObject({ what: z.literal("referenceYaw"), ...place, unit: unitOf("referenceYaw"), ...scaled })
    .describe("Angle of the drive, positive turning left."),
  z
    .strictObject({ what: z.literal("referenceSway"), ...place, unit: unitOf("referenceSway"), ...scaled })
    .describe("Sideways place of the drive, positive to the left."),
  z
    .strictObject({ what: z.literal("syncEdge"), ...place })
    .describe("Counts camera pulses. Among sensor readings each change of the count is a pulse."),
  z
    .strictObject({ what: z.literal("button"), ...place })
    .describe("The operator's button: its number. Among sensor readings 0 means not pressed."),
]);

const packetSchema = z.strictObject({
  name: z.string().min(1).max(40).describe("For messages to the operator."),
  id: z
    .strictObject({
      at: place.at,
      type: place.type,
      endian: place.endian,
      equals: z.union([z.number(), z.string().min(1).max(40)]).describe("Lines may give a text."),
    })
    .optional()
    .describe("Tells this packet from the others; packets are tried in the order listed."),
  bytes: z
    .number()
    .int()
    .min(1)
    .max(8192)
    .optional()
    .describe("Bytes of the whole frame (columns of the line), where always the same."),
  gather: z
    .enum(["tick", "sequence"])
    .optional()
    .describe(
      "Packets that agree in this make one sweep together; it is complete when a packet with another value comes.",
    ),
  fields: z.array(fieldSchema).max(1000).default([]).describe("None: a packet known, and left alone."),
});

export const packetLayoutSchema = z.strictObject({
  name: z.string().min(1).max(60).describe("Whose packets these are."),
  notes: z.string().max(2000).default("").describe("Free text."),
  framing: framingSchema.describe("How frames are told apart in the stream."),
  endian: endian.default("little").describe("Byte order, unless a field says otherwise."),
  checksum: checksumSchema.prefault({ kind: "none" }),
  packets: z.array(packetSchema).min(1).max(32).describe("The kinds of packets sent."),
});

export type PacketLayout = z.infer<typeof packetLayoutSchema>;
export type PacketLayoutKind = PacketLayout["packets"][number];
export type PacketField = PacketLayoutKind["fields"][number];
export type BinaryType = z.infer<typeof binaryType>;
