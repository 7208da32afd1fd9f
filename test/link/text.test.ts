import fc from "fast-check";
import { expect, test } from "vitest";
import { encodeTextLine, TextLineDecoder } from "../../bridge/link/text.ts";
import type { SensorModel } from "../../bridge/rig/sensor-model.ts";
import { CHANNELS, createSweep, HAS_ACCEL, HAS_GYRO, HAS_INERTIAL, HAS_MAG } from "../../bridge/sweep.ts";
import { Log, pushCut } from "./log.ts";

const NINE: Pick<SensorModel, "mag"> = { mag: { rangeUT: 1200, bits: 16, noiseUT: 0.4 } };
const SIX: Pick<SensorModel, "mag"> = {};

function decode(text: string, models = [NINE, SIX], cuts: readonly number[] = []) {
  const log = new Log();
  const decoder = new TextLineDecoder(models, log);
  pushCut(decoder, Buffer.from(text, "latin1"), cuts);
  return { ...decoder.counters, complaint: decoder.complaint, sweeps: log.sweeps };
}

const LINE = "7,2000,0.1,-0.2,3e-1,0,0,9.81,20,-1,-43.5,1,2,3,4,5,6";

test("a line is a sweep: sequence, tick, nine values, six where the model has no magnetometer", () => {
  const { sweeps, good, discardedBytes } = decode(`${LINE}\n`);
  expect(good).toBe(1);
  expect(discardedBytes).toBe(0);
  const [sweep] = sweeps;
  expect([sweep.sequence, sweep.tickUs]).toEqual([7, 2000]);
  expect([...sweep.raw.slice(0, 15)]).toEqual([0.1, -0.2, 0.3, 0, 0, 9.81, 20, -1, -43.5, 1, 2, 3, 4, 5, 6]);
  expect([...sweep.present]).toEqual([HAS_INERTIAL | HAS_MAG, HAS_INERTIAL]);
});

test("CR LF, blanks around numbers, signs and exponents are taken as they come", () => {
  const { sweeps } = decode("1, 2 ,\t+1.5,-.5,5.,1E2,2e+1,3e-1\r\n", [SIX]);
  expect([...sweeps[0].raw.slice(0, 6)]).toEqual([1.5, -0.5, 5, 100, 20, 0.3]);
});

test("three empty columns mean that part is absent; its row keeps the last value", () => {
  const { sweeps } = decode("1,0,1,2,3,4,5,6,7,8,9\n2,0,1,2,3,4,5,6,,,\n3,0,,,,,,,1,1,1\n4,0,,,,9,9,9,,,\n", [
    NINE,
  ]);
  expect(sweeps.map((sweep) => sweep.present[0])).toEqual([
    HAS_GYRO | HAS_ACCEL | HAS_MAG,
    HAS_GYRO | HAS_ACCEL,
    HAS_MAG,
    HAS_ACCEL,
  ]);
  expect([...sweeps[3].raw]).toEqual([1, 2, 3, 9, 9, 9, 1, 1, 1]);
});

test("empty sequence or tick reads as none; greater counts wrap like the hub's counters", () => {
  const { sweeps } = decode(",,1,2,3,4,5,6\n65537,4294967298,1,2,3,4,5,6\n", [SIX]);
  expect(sweeps.map((sweep) => [sweep.sequence, sweep.tickUs])).toEqual([
    [-1, -1],
    [1, 2],
  ]);
});

/** Of "1,2,1,2,3,4,5,6", by Python's binascii.crc_hqx started at 0xFFFF. */
const CRC_OF_LINE = "A99A";

test("a right checksum passes in either case, a wrong one stops the line", () => {
  const line = "1,2,1,2,3,4,5,6";
  expect(decode(`${line}*${CRC_OF_LINE}\n`, [SIX]).good).toBe(1);
  expect(decode(`${line}*${CRC_OF_LINE.toLowerCase()}\r\n`, [SIX]).good).toBe(1);
  const wrong = decode(`1,2,1,2,3,4,5,7*${CRC_OF_LINE}\n`, [SIX]);
  expect(wrong).toMatchObject({ good: 0, badChecksum: 1, discardedBytes: 21 });
});

test("comments are left alone, and are not discarded bytes", () => {
  expect(decode(`# bench hub 2, gyro in rad/s\n${LINE}\n`)).toMatchObject({
    good: 1,
    notUnderstood: 0,
    discardedBytes: 0,
  });
});

test.each([
  ["a word", "1,2,1,2,three,4,5,6"],
  ["hexadecimal", "1,2,0x1,2,3,4,5,6"],
  ["Infinity", "1,2,Infinity,2,3,4,5,6"],
  ["a number beyond doubles", "1,2,1e999,2,3,4,5,6"],
  ["two points", "1,2,1.2.3,2,3,4,5,6"],
  ["a part with two of its three columns", "1,2,1,,3,4,5,6"],
  ["a negative tick", "1,-2,1,2,3,4,5,6"],
  ["an asterisk without a checksum", "1,2,1,2,3,4,5,6*"],
])("not understood, and the next line is: %s", (_title, line) => {
  const result = decode(`${line}\n3,4,1,2,3,4,5,6\n`, [SIX]);
  expect(result).toMatchObject({ notUnderstood: 1, good: 1, discardedBytes: line.length + 1 });
  expect(result.sweeps.map((sweep) => sweep.sequence)).toEqual([3]);
});

test("another number of columns is a complaint, until a line fits", () => {
  expect(decode(`${LINE},1\n`).complaint).toBe(
    "The lines have 18 columns; the rig's sensors need 17. Correct the rig file, or the hub.",
  );
  expect(decode(`${LINE},1\n${LINE}\n`).complaint).toBeNull();
});

test("what is encoded comes back the very same, every bit of every number", () => {
  const number = fc.double({ noNaN: true, noDefaultInfinity: true });
  const part = fc.constantFrom(0, HAS_INERTIAL, HAS_MAG, HAS_INERTIAL | HAS_MAG);
  fc.assert(
    fc.property(
      fc.array(number, { minLength: 2 * CHANNELS, maxLength: 2 * CHANNELS }),
      fc.tuple(part, fc.constantFrom(0, HAS_INERTIAL)),
      fc.integer({ min: -1, max: 0xffff }),
      fc.integer({ min: -1, max: 0xffff_ffff }),
      (raw, present, sequence, tickUs) => {
        const sweep = Object.assign(createSweep(2), { sequence, tickUs });
        sweep.raw.set(raw);
        sweep.present.set(present);
        const { sweeps, good } = decode(encodeTextLine(sweep, [NINE, SIX]));
        expect(good).toBe(1);
        expect([sweeps[0].sequence, sweeps[0].tickUs]).toEqual([sequence, tickUs]);
        expect(sweeps[0].present).toEqual(sweep.present);
        sweeps[0].raw.forEach((value, i) => {
          const bit = i % CHANNELS < 6 ? HAS_INERTIAL : HAS_MAG;
          const isPresent = (present[Math.floor(i / CHANNELS)] & bit) !== 0;
          expect(Object.is(value, isPresent ? raw[i] : 0)).toBe(true);
        });
      },
    ),
  );
});

test("whatever comes, it never throws, chunking changes nothing, and the line after the next LF is found", () => {
  const likely = fc.string({ unit: fc.constantFrom(..."0123456789.,,,,,-+eE*# \r\n\u00ff"), maxLength: 120 });
  const noise = fc.array(fc.oneof(likely, fc.constant(`${LINE}\n`)), { maxLength: 6 });
  fc.assert(
    fc.property(noise, fc.array(fc.nat(1000)), (pieces, cuts) => {
      const text = `${pieces.join("")}\n${LINE}\n`;
      const whole = decode(text);
      expect(decode(text, [NINE, SIX], cuts)).toEqual(whole);
      expect(whole.sweeps.at(-1)?.tickUs).toBe(2000);
    }),
  );
});
