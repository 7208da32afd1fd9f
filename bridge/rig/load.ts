/** Reads a rig file and all it refers to: sensor models, packet layout, thresholds, calibration records. */
import type { z } from "zod";
import { BendwatchError } from "../errors.ts";
import { applyRecords, recordsFolder, type UsedRecord } from "./calibration-record.ts";
import { type CheckLimits, checkLimitsSchema } from "./check-limits.ts";
import { configPath, deepFreeze, definedOnly, loadConfig } from "./load-config.ts";
import { type PacketLayout, packetLayoutSchema } from "./packet-layout.ts";
import { type RigFile, rigSchema } from "./rig.ts";
import { type SensorModel, sensorModelSchema } from "./sensor-model.ts";
import { type Thresholds, thresholdsSchema } from "./thresholds.ts";

/** A rig with its sensor models and thresholds resolved: all the pipeline needs, stored whole in every trial. */
export interface Rig extends RigFile {
  /** One per sensor, in order. */
  readonly models: readonly SensorModel[];
  /** The declared layout that `hub.layout` names; null for native and text, which need none. */
  readonly packetLayout: PacketLayout | null;
  readonly thresholds: Thresholds;
  /** Of the release check. */
  readonly checkLimits: CheckLimits;
  /** Calibration records that numbers of its sensors were taken from. */
  readonly recordsUsed: readonly UsedRecord[];
}

export { checkConfig, loadConfig } from "./load-config.ts";

/**
 * Loads a rig with its models, packet layout and thresholds.
 * @throws BendwatchError naming everything wrong in the rig file, or else in all the files it refers to
 */
export function loadRig(nameOrPath: string): Rig {
  const file = loadConfig("rigs", nameOrPath, rigSchema);
  const references = new References(configPath("rigs", nameOrPath));
  const models = file.sensors.map(({ model }, i) =>
    references.load(`sensors[${i}].model`, "sensors", model, sensorModelSchema),
  );
  const { layout } = file.hub;
  const isDeclared = layout !== "native" && layout !== "text";
  const packetLayout = isDeclared
    ? references.load("hub.layout", "layouts", layout, packetLayoutSchema)
    : null;
  references.throwProblems();
  const thresholds = loadConfig("", "thresholds", thresholdsSchema);
  const checkLimits = loadConfig("", "check", checkLimitsSchema);
  const { sensors, used } = applyRecords(file.sensors, recordsFolder(file.calibrations), file.name);
  return deepFreeze({
    ...file,
    sensors,
    recordsUsed: used,
    models: models as SensorModel[],
    packetLayout,
    thresholds: { ...thresholds, ...definedOnly(file.flags) },
    checkLimits: { ...checkLimits, ...definedOnly(file.check) },
  });
}

/** Loads the files that a rig file names, each once, and keeps what is wrong in them until all were tried. */
class References {
  readonly #from: string;
  readonly #loaded = new Map<string, unknown>();
  readonly #problems: BendwatchError[] = [];

  constructor(from: string) {
    this.#from = from;
  }

  /** @returns null when something is wrong: throwProblems then throws */
  load<T>(key: string, kind: string, name: string, schema: z.ZodType<T>): T | null {
    const path = configPath(kind, name);
    if (!this.#loaded.has(path)) this.#loaded.set(path, this.#attempt(key, kind, name, schema));
    return this.#loaded.get(path) as T | null;
  }

  #attempt<T>(key: string, kind: string, name: string, schema: z.ZodType<T>): T | null {
    try {
      return loadConfig(kind, name, schema);
    } catch (error) {
      if (!(error instanceof BendwatchError)) throw error;
      const details = error.details.map((d) => ({ ...d, where: `${this.#from}, ${key}: ${d.where}` }));
      this.#problems.push(new BendwatchError(error.code, details, { cause: error }));
      return null;
    }
  }

  throwProblems(): void {
    const [first] = this.#problems;
    if (first === undefined) return;
    const details = this.#problems.flatMap((problem) => problem.details);
    throw new BendwatchError(first.code, details, { cause: first });
  }
}

/** The same rig with the newest calibration records, or those its sensors name, instead of those it was loaded with. */
export function withRecordsOfNow(rig: Rig): Rig {
  const { sensors, used } = applyRecords(rig.sensors, recordsFolder(rig.calibrations), rig.name);
  return deepFreeze({ ...rig, sensors, recordsUsed: used });
}
