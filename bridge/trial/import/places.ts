/** Which table holds which sensors, and whether the column map fits the rig at all. */
import { BendwatchError, type ErrorDetail } from "../../errors.ts";
import type { ColumnMap } from "../../rig/column-map.ts";
import type { Rig } from "../../rig/load.ts";

export interface TableFile {
  readonly path: string;
  /** Name of the sensor whose table this is; files without one take the remaining sensors in the rig's order. */
  readonly sensor?: string;
}

/** A FILE argument: a path, or SENSOR=PATH with a sensor of the rig. */
export function tableFile(argument: string, rig: Rig): TableFile {
  const at = argument.indexOf("=");
  const sensor = argument.slice(0, Math.max(0, at));
  return rig.sensors.some(({ name }) => name === sensor)
    ? { path: argument.slice(at + 1), sensor }
    : { path: argument };
}

/**
 * Checks that the map describes every sensor of the rig, with the parts its model has.
 * @throws BendwatchError TABLE_INVALID listing all that does not fit
 */
export function checkMapFitsRig(map: ColumnMap, rig: Rig): void {
  const where = `column map "${map.name}"`;
  if (map.sensors.length !== 1 && map.sensors.length !== rig.sensors.length) {
    throw new BendwatchError("TABLE_INVALID", {
      where: `${where}, sensors`,
      found: `${map.sensors.length} entries`,
      expected: `one that fits every sensor, or one for each of the ${rig.sensors.length} sensors of "${rig.name}"`,
    });
  }
  const problems = rig.sensors.flatMap(({ name, model }, i): ErrorDetail[] => {
    const entry = map.sensors.length === 1 ? 0 : i;
    const mapped = map.sensors[entry]!.mag !== undefined;
    if (mapped === (rig.models[i]!.mag !== undefined)) return [];
    const found = mapped ? "columns" : "no columns";
    const expected = mapped ? "none: its" : "three: its";
    const has = mapped ? "has no magnetometer" : "has a magnetometer";
    return [
      {
        where: `${where}, sensors[${entry}].mag`,
        found,
        expected: `${expected} model ${model} (${name}) ${has}`,
      },
    ];
  });
  if (problems.length > 0) throw new BendwatchError("TABLE_INVALID", problems);
}

/**
 * The rig's sensors (counting from 0) that each file holds: all of them in a wide table; else one each, first those the
 * files name, then the remaining ones in the rig's order.
 * @throws BendwatchError TABLE_INVALID when there are too few or too many files, or two for one sensor
 */
export function placeFiles(files: readonly TableFile[], map: ColumnMap, rig: Rig): number[][] {
  const all = rig.sensors.map((_, i) => i);
  const wide = map.arrangement === "wide";
  const expected = wide ? 1 : all.length;
  if (files.length !== expected) {
    const listed = files.map(({ path }) => path).join(", ");
    throw new BendwatchError("TABLE_INVALID", {
      where: "files",
      found: `${files.length} (${listed})`,
      expected: wide ? "one wide table" : `${expected}, one for each sensor of "${rig.name}"`,
    });
  }
  if (wide) return [all];
  const named = files.map(({ path, sensor }) => (sensor === undefined ? -1 : sensorIndex(path, sensor, rig)));
  const taken = new Set(named);
  const free = all.filter((i) => !taken.has(i));
  const places = named.map((sensor) => [sensor < 0 ? free.shift()! : sensor]);
  const twice = named.findIndex((sensor, i) => sensor >= 0 && named.indexOf(sensor) < i);
  if (twice >= 0) {
    throw new BendwatchError("TABLE_INVALID", {
      where: files[twice]!.path,
      found: `a second table of sensor ${files[twice]!.sensor}`,
      expected: "one for each sensor",
    });
  }
  return places;
}

function sensorIndex(path: string, sensor: string, rig: Rig): number {
  const index = rig.sensors.findIndex(({ name }) => name === sensor);
  if (index >= 0) return index;
  const names = rig.sensors.map(({ name }) => name).join(", ");
  throw new BendwatchError("TABLE_INVALID", {
    where: path,
    found: `sensor "${sensor}"`,
    expected: `one of the rig's: ${names}`,
  });
}
