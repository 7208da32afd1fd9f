/**
 * The tables of an export: columns, types, units and how many decimals. The decimals keep more than the measurement
 * knows, and little enough to read:
 *
 *     time         6   1 µs, the hub's tick
 *     mm           3   1 µm, far below what the method resolves
 *     quaternion   7   rounding turns an orientation by at most 0.00002 degrees
 *     degrees      3   finer than any sensor's noise
 *     ratio        4   gains and correlations of real trials differ in the second
 *     ms           3   1 µs, the hub's tick
 *     reading      5   far below one count of a 16-bit sensor
 */
import { TRUST_WORDS } from "../../wire/trust.ts";

/** Table Schema (Frictionless, v1) types we use. */
export type FieldType = "number" | "integer" | "string" | "boolean";

export interface Column {
  readonly name: string;
  readonly type: FieldType;
  /** Unit symbol (SI, or deg, mm); "1" for pure numbers; absent for texts and counts. */
  readonly unit?: string;
  readonly description: string;
}

export const DECIMALS = { time: 6, mm: 3, quaternion: 7, degrees: 3, ratio: 4, ms: 3, reading: 5 } as const;

/** Stations of the midline table, evenly spaced from nose to tail tip. */
export const STATION_COUNT = 41;

export const seconds = (name: string, description: string): Column => ({
  name,
  type: "number",
  unit: "s",
  description,
});
export const number = (name: string, unit: string, description: string): Column => ({
  name,
  type: "number",
  unit,
  description,
});
export const text = (name: string, description: string): Column => ({ name, type: "string", description });
export const integer = (name: string, description: string): Column => ({
  name,
  type: "integer",
  description,
});

const hubTime = seconds("time_s", "Hub time since the first sweep.");

const AXES = [
  ["x_mm", "east"],
  ["y_mm", "north"],
  ["z_mm", "up"],
] as const;

export interface Table {
  readonly name: string;
  readonly description: string;
  readonly columns: readonly Column[];
}

const midlineColumns: readonly Column[] = Array.from({ length: STATION_COUNT }, (_, i) =>
  AXES.map(([axis, direction]) =>
    number(
      `${axis}_${String(i).padStart(3, "0")}`,
      "mm",
      `How far ${direction} of the mean nose the midline is at ${((100 * i) / (STATION_COUNT - 1)).toFixed(1)} % of body length.`,
    ),
  ),
).flat();

export const MIDLINE: Table = {
  name: "midline",
  description:
    "Where the midline is, one row a sweep: earth axes, the mean place of the nose at the origin. Where its motion is not known, it stays there.",
  columns: [hubTime, ...midlineColumns],
};

export const SENSORS: Table = {
  name: "sensors",
  description: "Orientation of each sensor (body axes x nose, y left, z up, to earth axes east, north, up).",
  columns: [
    hubTime,
    text("sensor", "Name of the sensor."),
    ...["qw", "qx", "qy", "qz"].map((name) =>
      number(name, "1", "Unit quaternion, Hamilton, scalar part qw, body axes to earth."),
    ),
    number(
      "yaw_deg",
      "deg",
      "Turn about the vertical from nose east; left (anticlockwise from above) positive.",
    ),
    number("pitch_deg", "deg", "Elevation of the nose; nose-up positive."),
    number("roll_deg", "deg", "Turn about the body's long axis; right side down positive."),
    text("trust", `${TRUST_WORDS.slice(0, -1).join(", ")} or ${TRUST_WORDS.at(-1)}.`),
    {
      name: "bridged",
      type: "boolean",
      description: "1 where no reading arrived and the orientation is a prediction, 0 otherwise.",
    },
  ],
};

export const FLAGS: Table = {
  name: "flags",
  description: "Conditions the monitor raised.",
  columns: [
    text("kind", "What was wrong."),
    text("sensor", "Name of the sensor; empty for the whole rig."),
    text("severity", "notice, caution or alarm."),
    seconds("start_s", "Hub time of the onset."),
    seconds("end_s", "Hub time of the end; empty where it lasted to the trial's end."),
    text("detail", "What was measured."),
  ],
};

export const EVIDENCE: Table = {
  name: "evidence",
  description:
    "What each flag was raised upon: its sensor's readings (every sensor's for the whole rig) from 2 s before its onset to 2 s after, in the sensor's own axes, before calibration. Cells are empty where nothing was read.",
  columns: [
    integer("flag", "Row of the flags table, counted from 1."),
    hubTime,
    text("sensor", "Name of the sensor that was read."),
    ...["x", "y", "z"].map((axis) => number(`rate_${axis}_deg_s`, "deg/s", `Angular rate about ${axis}.`)),
    ...["x", "y", "z"].map((axis) => number(`force_${axis}_m_s2`, "m/s^2", `Specific force along ${axis}.`)),
    ...["x", "y", "z"].map((axis) => number(`field_${axis}_ut`, "uT", `Magnetic field along ${axis}.`)),
  ],
};

export const MARKS: Table = {
  name: "marks",
  description: "Notes made during the trial.",
  columns: [
    hubTime,
    text("text", "The note."),
    text("from", "Who made it: operator, hub button or trial (replayed)."),
  ],
};

export const SYNC: Table = {
  name: "sync",
  description: "Camera frame pulses.",
  columns: [hubTime, integer("edge", "The hub's count of pulses.")],
};

export const FRAMES: Table = {
  name: "frames",
  description:
    "The midline at each camera frame pulse, interpolated between sweeps (cubic); cells are empty where sweeps are missing around the pulse.",
  columns: [hubTime, integer("edge", "The hub's count of pulses."), ...midlineColumns],
};

export const REFERENCE: Table = {
  name: "reference",
  description:
    "What the drive did at each sweep's time, interpolated between its readings (cubic), with the rig file's signs, zeros and delay put right; sweeps where its readings are missing are left out.",
  columns: [
    hubTime,
    number("yaw_deg", "deg", "The drive's yaw; left positive."),
    number("sway_mm", "mm", "The drive's sway; left positive."),
  ],
};

export const DRIVE: Table = {
  name: "drive",
  description:
    "The body beside its drive over the whole trial: each sensor's yaw against the drive's yaw, and the midline's displacement across the travel axis, at stations, against the drive's sway. Mean and straight drift of each window are taken off.",
  columns: [
    text("sensor", "Name of the sensor; empty for the midline."),
    number("station", "1", "Place along the body, 0 nose to 1 tail tip."),
    text("against", "What of the drive: yaw or sway."),
    number("gain", "1", "Amplitude over the drive's."),
    number("lag_ms", "ms", "How long after the drive; negative before it."),
    number("rmse_deg", "deg", "Root mean square of the sensor's yaw minus the drive's."),
    number("rmse_lag_removed_deg", "deg", "The same with the lag taken off."),
    number("rmse_mm", "mm", "Root mean square of the displacement minus the drive's sway."),
    number("rmse_lag_removed_mm", "mm", "The same with the lag taken off."),
    number("r2", "1", "Square of the correlation coefficient, with the lag taken off."),
  ],
};

export const CAMERA: Table = {
  name: "camera",
  description:
    "The midline beside a camera's over the whole trial: displacement across the travel axis, at stations. The camera's is scaled to the body's length, taken against its own nose, and laid upon the midline by one turn and one shift.",
  columns: [
    number("station", "1", "Place along the body, 0 nose to 1 tail tip; empty for all stations together."),
    number("gain", "1", "Amplitude over the camera's."),
    number("lag_ms", "ms", "How long after the camera's; negative before it."),
    number("rmse_mm", "mm", "Root mean square of the displacement minus the camera's."),
    number("rmse_percent_length", "%", "The same as percent of the body's length."),
    number("r2", "1", "Square of the correlation coefficient, with the lag taken off."),
  ],
};

/** All but those of the gait (gait-tables.ts). */
export const TABLES: readonly Table[] = [
  MIDLINE,
  SENSORS,
  FLAGS,
  EVIDENCE,
  MARKS,
  SYNC,
  FRAMES,
  REFERENCE,
  DRIVE,
  CAMERA,
];
