/**
 * What to do about each flag: one sentence a kind, in the operator's words. `{name}` is the sensor, `{place}` its place on
 * the body ("58 % of the body"), `{neighbours}` the sensors next to it.
 */
import type { FlagKind } from "../wire/flag.ts";

/** Flag kinds, and the notice that a building's own field was taken as the reference. */
export type AdviceKey = FlagKind | "building field";

export const FLAG_ADVICE: Readonly<Record<AdviceKey, string>> = {
  "gyro saturation":
    "{name} turns faster than it can measure: set a larger gyroscope range on the hub, or beat more slowly.",
  "accel saturation":
    "{name} is shaken harder than it can measure: set a larger accelerometer range on the hub, or look for something knocking at {place}.",
  "mag saturation":
    "A strong magnet or steel touches {place}: take it away, and do not use {name}'s heading until this ends.",
  "low headroom":
    "{name} is close to the end of its range: choose a larger range before the next, faster run.",
  "magnetic interference": "Something magnetic is near {place}; move it away or trust {name}'s heading less.",
  "magnetic interference at several sensors":
    "Something large and magnetic lies along the body about {place}, such as a plate, a rail or a cable: move it away, or trust the headings there less.",
  "alternating field":
    "A motor or a mains cable runs near {place}: move it or its cable away; averaged headings suffer little, single ones do.",
  "alternating field at several sensors":
    "A motor or a mains cable runs along the body about {place}: move it or its cable away; averaged headings suffer little, single ones do.",
  "rig-wide alternating field":
    "Mains or a drive reaches all sensors: look for a cable loop, a pump or a motor supply near the tank, and switch off what you can.",
  "rig-wide magnetic interference":
    "The field is off along the whole body: look for a motor, a magnet or steel brought near the tank, and trust no heading until this ends.",
  "heading held by the body":
    "The magnetometers are left out for now: keep the body beating, trust the shape, and read no compass directions until this ends.",
  "building field":
    "The building bends the Earth's field here: the shape is not affected, but do not read compass directions from this run.",
  "lost samples": "Check the plug and cable at {place}, then between hub and computer.",
  "duplicate sweeps":
    "Something sends the hub's packets twice: look for an adapter or a program between hub and computer that repeats them.",
  "late sweeps":
    "Packets overtake each other on the way: connect the hub by a cable of its own, without a network or hub between.",
  "corrupt packets":
    "Check cable, connector and ground between hub and computer, and that both use the same baud rate.",
  "link silent": "Check that the hub has power and its cable is plugged in; recording goes on by itself.",
  "stuck axis":
    "Power {name} off and on; if the axis stays still, replace the sensor and rely on {neighbours} until then.",
  "sensor read errors":
    "The hub cannot read {name}: check its plug at {place} and the cable from {neighbours}.",
  "sensor flipped":
    "{name} reads as if turned by half: check how it sits at {place} and its mounting in the rig file.",
  "mounting changed":
    "{name} has turned where it sits, at {place}: fix it and find its mounting anew; until then do not use it.",
  "sensors swapped":
    "Two sensors read as if they had changed places: check their plugs from {place} on, and their order in the rig file.",
  "noise at rest":
    "{name} is noisier than its model: stop whatever shakes {place}, then look at its supply and cable; if it stays so, replace it.",
  "gyro bias":
    "Find {name}'s gyroscope bias anew with the body at rest; if it comes back, replace the sensor.",
  "gravity at rest":
    "{name} does not read gravity: calibrate its accelerometer in six positions, and check its range in the sensor model.",
  "field at rest":
    "{name} does not read the field of this place: calibrate its magnetometer anew, away from iron.",
  "on-board fusion differs":
    "{name}'s own orientation is not ours, which is shown: check its mounting in the rig file, and its frame and axes in the packet layout.",
  "recording trouble": "Free disk space or choose another folder now: what arrives is not being kept.",
  "disk nearly full": "Make room on the disk, or record to another one, before the next run.",
  "supply low": "Charge or change the hub's supply before the next run, and look for a long or thin cable.",
  "hub temperature": "Bring the hub back to a temperature it stands: water, shade, or a pause.",
  "hub fault":
    "The hub reports a fault of its own: check the plugs of all sensors, then power it off and on between runs.",
  "clock drift":
    "Hub and computer disagree on how long a second is: let the computer's clock be set before a run, and when it is right, trust frequencies and speeds less by as much.",
  "hub restarted":
    "The hub started anew: check its supply, and compare the time marks before and after when you evaluate.",
};

/** A sensor as advice names it. */
export interface Place {
  readonly name: string;
  /** 0 nose, 1 tail tip. */
  readonly station: number;
}

/** The advice for a flag on sensor `sensor` (-1: the rig), with its name, place and neighbours filled in. */
export function adviceFor(key: AdviceKey, sensor: number, sensors: readonly Place[]): string {
  const here = sensors[sensor];
  const around = [sensors[sensor - 1], sensors[sensor + 1]].filter(
    (s) => here !== undefined && s !== undefined,
  );
  return FLAG_ADVICE[key]
    .replaceAll("{name}", here?.name ?? "the rig")
    .replaceAll("{place}", here ? `${Math.round(here.station * 100)} % of the body` : "the hub")
    .replaceAll("{neighbours}", around.map((s) => s!.name).join(" and ") || "the others");
}
