/**
 * Faults on request: what can be asked for, and how a request is written.
 *
 *     kind@start+duration            a fault of the whole rig, seconds from the start of the rehearsal
 *     kind:sensor@start+duration     of one sensor, by its name
 *     stuck:sensor.axis@...          of one axis: gx gy gz ax ay az mx my mz
 */
import { BendwatchError, type ErrorDetail } from "../errors.ts";

/** Every kind: what it concerns, and what it does in one line (shown by the command's help). */
export const FAULT_KINDS = {
  magnet: { of: "sensor", does: "a small magnet lies beside the unit: tens of µT in its own axes" },
  field: { of: "rig", does: "steel is brought near: the field at all units changes alike" },
  plate: { of: "sensor", does: "a steel plate lies beside the unit and the next one towards the tail" },
  motor: { of: "sensor", does: "a small motor runs beside the unit: its field alternates" },
  mains: {
    of: "rig",
    does: "a cable along the rig carries mains current: the field alternates at all units",
  },
  saturation: { of: "sensor", does: "the unit rattles in its mount, faster than its gyro can measure" },
  flattop: { of: "sensor", does: "the gyro limits well below its full scale" },
  stuck: { of: "axis", does: "the axis repeats one value" },
  noisy: { of: "sensor", does: "the unit's gyro and accelerometer are six times as noisy" },
  offset: { of: "sensor", does: "the unit's gyro is off by four times what its data sheet allows" },
  heavy: { of: "sensor", does: "the unit's accelerometer reads 8 % too much" },
  strong: { of: "sensor", does: "the unit's magnetometer reads 8 % too much" },
  slipped: { of: "sensor", does: "the unit's patch lets go: it turns by 34° about the body's long axis" },
  upended: { of: "sensor", does: "the unit sits upside down: half a turn about the body's long axis" },
  backward: { of: "sensor", does: "the unit faces the tail: half a turn about its vertical axis" },
  swapped: { of: "sensor", does: "the unit's plug and that of the next one are exchanged" },
  loose: { of: "sensor", does: "a loose connector: the unit's readings are absent in short runs" },
  unreadable: { of: "sensor", does: "the hub cannot read the unit and says so" },
  loss: { of: "rig", does: "one sweep in ten is lost on the way" },
  burst: { of: "rig", does: "all sweeps are lost" },
  corrupt: { of: "rig", does: "one packet in five arrives with flipped bits" },
  silence: { of: "rig", does: "no bytes arrive; the hub goes on counting" },
  repeated: { of: "rig", does: "one sweep in ten arrives twice" },
  overtaken: { of: "rig", does: "two later sweeps overtake one in ten" },
  restart: { of: "rig", does: "the hub is dark, then counts from zero" },
  drift: { of: "rig", does: "the hub's clock runs 600 ppm fast" },
  sag: { of: "rig", does: "the hub's supply sags to 4.4 V" },
  hot: { of: "rig", does: "the hub is at 68 °C" },
  bus: { of: "rig", does: "the hub says that the bus to the sensors fails" },
} as const satisfies Record<string, { of: "rig" | "sensor" | "axis"; does: string }>;

type FaultKinds = typeof FAULT_KINDS;
export type FaultKind = keyof FaultKinds;
/** Kinds that concern the whole rig, and those that concern a unit or one of its axes. */
export type RigFaultKind = { [K in FaultKind]: FaultKinds[K]["of"] extends "rig" ? K : never }[FaultKind];
export type SensorFaultKind = Exclude<FaultKind, RigFaultKind>;

/** Axis names in the order of a reading's nine numbers. */
export const AXES: readonly string[] = ["gx", "gy", "gz", "ax", "ay", "az", "mx", "my", "mz"];

export interface Fault {
  readonly kind: FaultKind;
  /** Index of the sensor; -1 for the whole rig. */
  readonly sensor: number;
  /** Place in the reading's nine numbers; -1 unless it concerns one axis. */
  readonly axis: number;
  readonly startS: number;
  readonly endS: number;
}

const FORM = /^([a-z]+)(?::(.+))?@(\d+(?:\.\d+)?)\+(\d+(?:\.\d+)?)$/;

/**
 * Reads one request.
 * @param sensorNames the rig's, in order
 * @throws BendwatchError COMMAND_INVALID
 */
export function parseFault(text: string, sensorNames: readonly string[]): Fault {
  const match = FORM.exec(text);
  if (match === null) {
    throw refuse({
      where: "--fault",
      found: `"${text}"`,
      expected: "kind@start+duration or kind:sensor@start+duration, in seconds, such as magnet:S4@20+8",
    });
  }
  const [, kind, target, start, duration] = match;
  if (!Object.hasOwn(FAULT_KINDS, kind)) {
    const kinds = Object.keys(FAULT_KINDS).join(", ");
    throw refuse({ where: `--fault ${text}`, found: `kind "${kind}"`, expected: `one of ${kinds}` });
  }
  if (Number(duration) === 0) {
    throw refuse({ where: `--fault ${text}`, found: "a duration of 0 s", expected: "a duration above 0 s" });
  }
  const place = parseTarget(text, FAULT_KINDS[kind as FaultKind].of, target, sensorNames);
  if (kind === "swapped" && place.sensor === sensorNames.length - 1) {
    const found = `the last sensor, "${target}"`;
    throw refuse({ where: `--fault ${text}`, found, expected: "a sensor that another one follows" });
  }
  const startS = Number(start);
  return { kind: kind as FaultKind, ...place, startS, endS: startS + Number(duration) };
}

function parseTarget(
  text: string,
  of: "rig" | "sensor" | "axis",
  target: string | undefined,
  sensorNames: readonly string[],
): { sensor: number; axis: number } {
  const where = `--fault ${text}`;
  if (of === "rig") {
    if (target === undefined) return { sensor: -1, axis: -1 };
    throw refuse({ where, found: `"${target}"`, expected: "no sensor: this fault is of the whole rig" });
  }
  const dot = of === "axis" ? (target?.lastIndexOf(".") ?? -1) : -1;
  const name = dot >= 0 ? target?.slice(0, dot) : target;
  const sensor = sensorNames.indexOf(name ?? "");
  if (sensor < 0) {
    const names = sensorNames.join(", ");
    throw refuse({ where, found: name ? `sensor "${name}"` : "no sensor", expected: `one of ${names}` });
  }
  if (of === "sensor") return { sensor, axis: -1 };
  const axisName = dot >= 0 ? target?.slice(dot + 1) : undefined;
  const axis = AXES.indexOf(axisName ?? "");
  if (axis < 0) {
    const found = axisName ? `axis "${axisName}"` : "no axis";
    throw refuse({ where, found, expected: `.axis after the sensor, one of ${AXES.join(", ")}` });
  }
  return { sensor, axis };
}

function refuse(detail: ErrorDetail): BendwatchError {
  return new BendwatchError("COMMAND_INVALID", detail);
}
