import fc from "fast-check";
import { expect, test } from "vitest";
import { DeclaredDecoder } from "../../bridge/link/declared.ts";
import { compileLayout } from "../../bridge/link/declared-compile.ts";
import { rotate } from "../../bridge/numeric/quaternion.ts";
import { type PacketLayout, packetLayoutSchema } from "../../bridge/rig/packet-layout.ts";
import { HAS_GYRO, HAS_MAG, HAS_ORIENTATION } from "../../bridge/sweep.ts";
import { hex, join, Log, pushCut } from "./log.ts";

function decoderOf(layout: object, sensorCount: number) {
  const checked: PacketLayout = packetLayoutSchema.parse({ name: "test layout", ...layout });
  const compiled = compileLayout(checked, sensorCount);
  return (bytes: Uint8Array, cuts: readonly number[] = []) => {
    const log = new Log();
    const decoder = new DeclaredDecoder(compiled, sensorCount, log);
    pushCut(decoder, bytes, cuts);
    const { counters, complaint } = decoder;
    return { ...counters, complaint, heard: log.heard, sweeps: log.sweeps, kinds: log.kinds };
  };
}

const gyro = (at: number, rest: object) => ({ what: "gyro", at, type: "i8", unit: "rad/s", ...rest });

test("axes may come from several fields, in any order, each with its own scale and offset", () => {
  const decode = decoderOf(
    {
      framing: { kind: "fixed", bytes: 4, syncHex: "7E" },
      packets: [
        {
          name: "one",
          fields: [
            gyro(1, { sensor: 0, axes: ["-z", "x"], scale: 0.5, offset: 1 }),
            gyro(3, { sensor: 0, axes: ["y"] }),
          ],
        },
      ],
    },
    1,
  );
  expect([...decode(hex("7e 04 fe 09")).sweeps[0].raw.slice(0, 3)]).toEqual([0, 9, -3]);
});

test("four zeros are no orientation, and a number that is none is no reading", () => {
  const decode = decoderOf(
    {
      framing: { kind: "fixed", bytes: 17, syncHex: "7E" },
      endian: "big",
      packets: [{ name: "one", fields: [{ what: "quaternion", sensor: 0, at: 1, type: "f32" }] }],
    },
    1,
  );
  const zero = "00 00 00 00";
  const one = "3f 80 00 00";
  const present = (parts: string[]) => decode(hex(`7e ${parts.join(" ")}`)).sweeps[0].present[0];
  expect(present([one, zero, zero, zero])).toBe(HAS_ORIENTATION);
  expect(present([zero, zero, zero, zero])).toBe(0);
  expect(present([one, zero, zero, "7f c0 00 00"])).toBe(0);
  expect(present([one, zero, zero, "7f 80 00 00"])).toBe(0);
});

test("a quaternion to north-east-down is turned to east-north-up", () => {
  const layout = {
    framing: { kind: "fixed", bytes: 5, syncHex: "7E" },
    packets: [
      {
        name: "one",
        fields: [{ what: "quaternion", sensor: 0, at: 1, type: "i8", scale: 0.01, frame: "ned" }],
      },
    ],
  };
  const decode = decoderOf(layout, 1);
  const nose = (packet: string) => {
    const out = [0, 0, 0];
    rotate(out, decode(hex(packet)).sweeps[0].onBoard, [1, 0, 0]);
    return out.map((v) => Math.round(v * 1000) / 1000 + 0);
  };
  // Level and ahead: north. Turned right by 90 deg, which is positive about down: east. Nose up by 53 deg.
  expect(nose("7e 64 00 00 00")).toEqual([0, 1, 0]);
  expect(nose("7e 47 00 00 47").map(Math.round)).toEqual([1, 0, 0]);
  expect(nose("7e 59 00 2d 00")[2]).toBeCloseTo(0.8, 1);
});

/** A packet for each sensor's gyro and each one's magnetometer: kind, count of sweeps, sensor (1 or 2), three axes. */
const GATHERED = {
  framing: { kind: "cobs", maxBytes: 16 },
  checksum: { kind: "sum8" },
  packets: [
    {
      name: "gyro",
      id: { at: 0, type: "u8", equals: 1 },
      gather: "sequence",
      fields: [
        { what: "sequence", at: 1, type: "u8" },
        { what: "sensorIndex", at: 2, type: "u8", numbers: [1, 2] },
        gyro(3, { sensor: "given" }),
      ],
    },
    {
      name: "mag",
      id: { at: 0, type: "u8", equals: 2 },
      gather: "sequence",
      fields: [
        { what: "sequence", at: 1, type: "u8" },
        { what: "sensorIndex", at: 2, type: "u8", numbers: [1, 2] },
        { what: "mag", sensor: "given", at: 3, type: "i8", unit: "µT" },
      ],
    },
    { name: "left alone", id: { at: 0, type: "u8", equals: 3 } },
  ],
};

/** A COBS frame without zeros inside, its sum appended. */
function frame(...bytes: number[]): Uint8Array {
  const sum = bytes.reduce((a, b) => a + b, 0) & 0xff;
  return Uint8Array.of(bytes.length + 2, ...bytes, sum, 0);
}

test("packets with one sequence number make one sweep, whichever kinds they are; a missing one leaves a gap", () => {
  const decode = decoderOf(GATHERED, 2);
  const bytes = join(
    frame(1, 254, 1, 1, 2, 3),
    frame(1, 254, 2, 4, 5, 6),
    frame(2, 254, 1, 7, 8, 9),
    frame(1, 255, 2, 1, 1, 1),
    frame(1, 1, 1, 1, 1, 1),
  );
  const result = decode(bytes);
  expect(result.sweeps.map((sweep) => [sweep.sequence, ...sweep.present])).toEqual([
    [254, HAS_GYRO | HAS_MAG, HAS_GYRO],
    [255, 0, HAS_GYRO],
  ]);
  expect([...result.sweeps[0].raw]).toEqual([1, 2, 3, 0, 0, 0, 7, 8, 9, 4, 5, 6, 0, 0, 0, 0, 0, 0]);
});

test("an 8-bit sequence goes on counting as a 16-bit one", () => {
  const decode = decoderOf(GATHERED, 2);
  const bytes = join(...[254, 255, 1, 2, 3].map((n) => frame(1, n, 1, 1, 1, 1)));
  expect(decode(bytes).sweeps.map((sweep) => sweep.sequence)).toEqual([254, 255, 257, 258]);
});

test("a packet without fields is known and left alone; an unknown one is not understood", () => {
  const result = decoderOf(GATHERED, 2)(join(frame(3, 9, 9), frame(4, 9, 9)));
  expect(result).toMatchObject({ good: 1, notUnderstood: 1, discardedBytes: 6, heard: [] });
});

test("while nothing has fitted, the operator is told so", () => {
  const decode = decoderOf(GATHERED, 2);
  expect(decode(frame(9, 9, 9)).complaint).toMatch(/none fits a packet of layout "test layout"/);
  expect(decode(join(frame(9, 9, 9), frame(3, 1, 1))).complaint).toBeNull();
  expect(decode(join(frame(3, 1, 1), frame(9, 9, 9))).complaint).toBeNull();
});

test("packets of pulses and presses report each one, without waiting for a change", () => {
  const decode = decoderOf(
    {
      framing: { kind: "fixed", bytes: 4, syncHex: "7E" },
      packets: [
        {
          name: "pulse",
          id: { at: 1, type: "u8", equals: 1 },
          fields: [{ what: "syncEdge", at: 2, type: "u16" }],
        },
        {
          name: "press",
          id: { at: 1, type: "u8", equals: 2 },
          fields: [{ what: "button", at: 2, type: "u8" }],
        },
      ],
    },
    2,
  );
  expect(decode(hex("7e 01 05 00 7e 01 06 00 7e 02 01 00 7e 02 01 00")).heard).toEqual([
    ["sync", { tickUs: -1, edge: 5 }],
    ["sync", { tickUs: -1, edge: 6 }],
    ["button", { tickUs: -1, button: 1 }],
    ["button", { tickUs: -1, button: 1 }],
  ]);
});

test("bytes behind the checksum are not covered by it", () => {
  const decode = decoderOf(
    {
      framing: { kind: "fixed", bytes: 6, syncHex: "7E" },
      checksum: { kind: "xor8", from: 1, trailingBytes: 1 },
      packets: [{ name: "one", fields: [gyro(1, { sensor: 0 })] }],
    },
    1,
  );
  expect(decode(hex("7e 01 02 04 07 0d 7e 01 02 04 07 0a 7e 01 02 04 06 0d"))).toMatchObject({
    good: 2,
    badChecksum: 1,
  });
});

test("32-bit milliseconds and fractions of a second become wrapping microseconds", () => {
  const tickOf = (field: object, text: string) =>
    decoderOf(
      {
        framing: { kind: "cobs" },
        endian: "big",
        packets: [
          {
            name: "one",
            fields: [
              { what: "tick", at: 0, ...field },
              { what: "button", at: 8, type: "u8" },
            ],
          },
        ],
      },
      2,
    )(hex(text)).heard;
  expect(tickOf({ type: "u32", unit: "ms" }, "0a ff ff ff ff 01 01 01 01 01 00")).toEqual([
    // (2^32 - 1) ms modulo 2^32 µs
    ["button", { tickUs: 2 ** 32 - 1000, button: 1 }],
  ]);
  expect(tickOf({ type: "f64", unit: "s" }, "03 40 08 01 01 01 01 01 02 01 00")).toEqual([
    ["button", { tickUs: 3_000_000, button: 1 }],
  ]);
});

const FRAMINGS = [
  { kind: "cobs", maxBytes: 16 },
  { kind: "slip", maxBytes: 16 },
  { kind: "fixed", bytes: 8 },
  { kind: "syncLength", syncHex: "7E7E", lengthAt: 2, lengthType: "u16", lengthAdds: -3, maxBytes: 16 },
];

test.each(FRAMINGS)("random bytes never throw, and chunking changes nothing: $kind", (framing) => {
  const decode = decoderOf(
    {
      framing,
      checksum: { kind: "xor8" },
      packets: [{ name: "one", fields: [{ what: "sequence", at: 3, type: "u8" }, gyro(4, { sensor: 0 })] }],
    },
    2,
  );
  const likely = fc.constantFrom(0, 1, 3, 8, 11, 0x7e, 0xc0, 0xdb, 0xdc);
  fc.assert(
    fc.property(
      fc.array(likely, { maxLength: 200 }),
      fc.array(fc.nat(300), { maxLength: 9 }),
      (list, cuts) => {
        const bytes = Uint8Array.from(list);
        expect(decode(bytes, cuts)).toEqual(decode(bytes));
      },
    ),
  );
});

test.each(FRAMINGS)("a million random bytes pass through: $kind", (framing) => {
  let state = 1;
  const bytes = Uint8Array.from({ length: 1_000_000 }, () => {
    state = (state * 16_807) % 2_147_483_647;
    return state & 0xff;
  });
  const decode = decoderOf({ framing, checksum: { kind: "CRC-32/ISO-HDLC" }, packets: [{ name: "one" }] }, 2);
  const result = decode(bytes);
  expect(result.bytes).toBe(1_000_000);
  // One frame in 2^32 would be taken for good: none here. Lone delimiters are not counted.
  expect(result.good).toBe(0);
  expect(result.discardedBytes).toBeGreaterThan(990_000);
});

test("random text never throws, chunking changes nothing, and the line after the next LF is found", () => {
  const decode = decoderOf(
    {
      framing: { kind: "line", separator: " ", maxBytes: 40 },
      packets: [
        {
          name: "one",
          bytes: 4,
          fields: [
            { what: "tick", at: 0, unit: "us" },
            { what: "gyro", sensor: 0, at: 1, unit: "rad/s" },
          ],
        },
      ],
    },
    2,
  );
  const likely = fc.string({ unit: fc.constantFrom(..."0123456789.-eE  x\r\n\u00ff"), maxLength: 120 });
  fc.assert(
    fc.property(likely, fc.array(fc.nat(200), { maxLength: 9 }), (noise, cuts) => {
      const bytes = Buffer.from(`${noise}\n 2000   1 -2.5 +3e-1\r\n`, "latin1");
      const whole = decode(bytes);
      expect(decode(bytes, cuts)).toEqual(whole);
      expect(whole.sweeps.at(-1)?.tickUs).toBe(2000);
      expect([...(whole.sweeps.at(-1)?.raw.slice(0, 3) ?? [])]).toEqual([1, -2.5, 0.3]);
    }),
  );
});
