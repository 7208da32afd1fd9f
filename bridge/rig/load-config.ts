/**
 * Reads one configuration file: checks it against its schema, reports everything wrong at once, freezes the result. A name
 * without a path or ending is looked up under config/.
 */
import { readFileSync } from "node:fs";
import { join } from "node:path";
import type { z } from "zod";
import { BendwatchError, type ErrorDetail } from "../errors.ts";
import { packageRoot } from "../paths.ts";

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

/** Path of a configuration file given by name or path. */
export function configPath(kind: string, nameOrPath: string): string {
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

/** Freezes a value and all it holds. */
export function deepFreeze<T>(value: T): T {
  if (value !== null && typeof value === "object" && !Object.isFrozen(value)) {
    Object.freeze(value);
    for (const child of Object.values(value)) deepFreeze(child);
  }
  return value;
}

/** What an object says, without what it leaves undefined. */
export function definedOnly<T extends object>(value: T): { [K in keyof T]?: Exclude<T[K], undefined> } {
  return Object.fromEntries(Object.entries(value).filter(([, v]) => v !== undefined)) as {
    [K in keyof T]?: Exclude<T[K], undefined>;
  };
}
