/** Reads the .jsonl files of a trial: one JSON value a line. A last line cut off by a crash is expected, and left out. */
import { readFileSync } from "node:fs";
import type { z } from "zod";

export interface JsonLines<T> {
  readonly values: readonly T[];
  /** Line numbers, from 1, that are not what the schema says; a last line without its line feed is not counted. */
  readonly badLines: readonly number[];
}

/** All lines of a file; none when there is no such file. @throws the system's error when it cannot be read */
export function readJsonLines<T>(path: string, schema: z.ZodType<T>): JsonLines<T> {
  let text: string;
  try {
    text = readFileSync(path, "utf8");
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === "ENOENT") return { values: [], badLines: [] };
    throw error;
  }
  const values: T[] = [];
  const badLines: number[] = [];
  const lines = text.split("\n");
  for (let i = 0; i < lines.length - 1; i++) {
    const value = parse(lines[i]!, schema);
    if (value === null) badLines.push(i + 1);
    else values.push(value);
  }
  return { values, badLines };
}

function parse<T>(line: string, schema: z.ZodType<T>): T | null {
  try {
    const result = schema.safeParse(JSON.parse(line));
    return result.success ? result.data : null;
  } catch {
    return null;
  }
}
