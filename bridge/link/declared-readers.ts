/**
 * What a declared layout is compiled into: flat lists of readers, each saying where a number stands and where it goes.
 * Made once at start; reading packets by them allocates nothing.
 *
 * Lines become binary frames first: the number of column c is an f64 at byte 8 c. So one kind of reader serves all.
 */
import type { Checksum } from "./checksum.ts";
import type { LengthRule } from "./length-framing.ts";
import type { Place } from "./numbers.ts";

/** Sensor number of a reading whose packet names its sensor. */
export const GIVEN = -1;

/** Bytes of a column once a line has become numbers. */
export const COLUMN_BYTES = 8;

/** value = number * factor + add, in the unit used inside. */
export interface ScaledReader extends Place {
  readonly factor: number;
  readonly add: number;
}

/** One axis of a part. */
export interface AxisReader extends ScaledReader {
  /** Place among the part's axes. */
  readonly slot: number;
  /** The number that means no reading; NaN for none. */
  readonly missing: number;
}

/** Gyro, accelerometer, magnetometer or quaternion of one sensor: there as a whole, or absent. */
export interface PartReader {
  /** Sensor, or GIVEN. */
  readonly sensor: number;
  /** Presence bit. */
  readonly bit: number;
  /** First channel in the sensor's row; 0 for a quaternion, which has a row of its own. */
  readonly channel: number;
  readonly axes: readonly AxisReader[];
  /** A quaternion to x north, y east, z down; the sweep has x east, y north, z up. */
  readonly isNed: boolean;
}

export interface StatusReader extends Place {
  readonly sensor: number;
}

export interface PresenceReader extends Place {
  readonly firstSensor: number;
  /** Presence bits it decides on. */
  readonly bits: number;
}

export interface CounterReader extends Place {
  readonly factor: number;
  /** Which of the layout's counters it shows. */
  readonly counter: number;
}

export interface SensorIndexReader extends Place {
  /** The number that stands for each sensor. */
  readonly numbers: readonly number[];
}

export interface PacketReader {
  readonly name: string;
  readonly id: (Place & { readonly equals: number | string }) | null;
  /** Frames of any other length are not this packet; both in bytes of the frame, for lines COLUMN_BYTES a column. */
  readonly minBytes: number;
  readonly maxBytes: number;
  readonly gather: "tick" | "sequence" | null;
  readonly parts: readonly PartReader[];
  readonly statuses: readonly StatusReader[];
  readonly presences: readonly PresenceReader[];
  readonly sequence: CounterReader | null;
  readonly tick: CounterReader | null;
  readonly sensorIndex: SensorIndexReader | null;
  readonly supply: ScaledReader | null;
  readonly temperature: ScaledReader | null;
  readonly referenceYaw: ScaledReader | null;
  readonly referenceSway: ScaledReader | null;
  readonly syncEdge: Place | null;
  readonly button: Place | null;
}

/** As checksumSchema describes it. */
export interface ChecksumRule {
  readonly compute: Checksum;
  /** Size of the checksum. */
  readonly bytes: number;
  readonly little: boolean;
  readonly from: number;
  readonly trailingBytes: number;
  readonly marker: string;
}

export type FramingRule =
  | { readonly kind: "cobs" | "slip"; readonly maxBytes: number }
  | { readonly kind: "length"; readonly rule: LengthRule }
  | { readonly kind: "line"; readonly separator: string; readonly maxBytes: number };

export interface CompiledLayout {
  readonly name: string;
  readonly framing: FramingRule;
  readonly checksum: ChecksumRule | null;
  readonly packets: readonly PacketReader[];
  /** Where each counter starts over; 0 for never. The decoder follows them. */
  readonly counterSizes: readonly number[];
}
