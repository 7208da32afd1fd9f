/**
 * Reads configuration: checks it against its schema, reports everything wrong at once, freezes the result. A name
 * without a path or ending is looked up under config/.
 */
import { readFileSync } from "node:fs";
import { join } from "node:path";
import type { z } from "zod";
import { BendwatchError, type ErrorDetail } from "../errors.ts";
import { packageRoot } from "../paths.ts";
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
}

/**
 * Reads and checks one JSON file.
 * @param kind folder under config/ for plain names: "rigs", "sensors", "layouts", "columns"
 * @throws BendwatchError CONFIG_UNREADABLE, CONFIG_INVALID
 */
export function loadConfig<T>(kind: string, nameOrPath: string, schema: z.ZodType<T>): T {
  const path = configPath(kind, nameOrPath);
  let text: string;
  try {
    text = readFileSync(path, "utf8");
  } catch (cause) {
    throw new BendwatchError(
      "CONFIG_UNREADABLE",
      { where: path, found: (cause as Error).message, expected: `a readable file of kind "${kind}"` },
      { cause },
    );
  }
  let json: unknown;
  try {
    json = JSON.parse(text);
  } catch (cause) {
    throw new BendwatchError(
      "CONFIG_UNREADABLE",
      { where: path, found: (cause as Error).message, expected: "valid JSON" },
      { cause },
    );
  }
  return checkConfig(path, json, schema);
}

/** Checks a parsed value against a schema. @throws BendwatchError CONFIG_INVALID naming file, key, found, expected */
export function checkConfig<T>(where: string, json: unknown, schema: z.ZodType<T>): T {
  const result = schema.safeParse(json, { reportInput: true });
  if (!result.success) throw new BendwatchError("CONFIG_INVALID", detailsOf(where, result.error.issues));
  return deepFreeze(result.data);
}

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
  return deepFreeze({
    ...file,
    models: models as SensorModel[],
    packetLayout,
    thresholds: { ...thresholds, ...definedOnly(file.flags) },
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

function configPath(kind: string, nameOrPath: string): string {
  if (/[\\/]|\.json$/i.test(nameOrPath)) return nameOrPath;
  return join(packageRoot, "config", kind, `${nameOrPath}.json`);
}

function detailsOf(file: string, issues: readonly z.core.$ZodIssue[]): ErrorDetail[] {
  return issues.flatMap((issue): ErrorDetail[] => {
    const key = keyOf(issue.path);
    if (issue.code === "unrecognized_keys") {
      return issue.keys.map((unknown) => ({
        where: `${file}, ${key === "" ? unknown : `${key}.${unknown}`}`,
        found: "a key that is not known here",
        expected: "only the keys of the schema (see config/README.md)",
      }));
    }
    const found = issue.input === undefined ? "nothing" : JSON.stringify(issue.input);
    return [
      {
        where: `${file}, ${key || "(top level)"}`,
        found,
        expected: issue.message.replace(/^[A-Z][a-z ]+[:.] expected /i, "").replace(/, received .*$/, ""),
      },
    ];
  });
}

function keyOf(path: readonly PropertyKey[]): string {
  return path.reduce<string>(
    (text, part) =>
      typeof part === "number" ? `${text}[${part}]` : text === "" ? String(part) : `${text}.${String(part)}`,
    "",
  );
}

function definedOnly<T extends object>(value: T): { [K in keyof T]?: Exclude<T[K], undefined> } {
  return Object.fromEntries(Object.entries(value).filter(([, v]) => v !== undefined)) as {
    [K in keyof T]?: Exclude<T[K], undefined>;
  };
}

function deepFreeze<T>(value: T): T {
  if (value !== null && typeof value === "object" && !Object.isFrozen(value)) {
    Object.freeze(value);
    for (const child of Object.values(value)) deepFreeze(child);
  }
  return value;
}
