/** A table file as rows of text cells with their line numbers: opened, unpacked when gzipped, decoded and split. */
import { closeSync, createReadStream, openSync, readSync } from "node:fs";
import { pipeline } from "node:stream";
import { createGunzip } from "node:zlib";
import { CsvError, type Options, parse } from "csv-parse";
import { BendwatchError } from "../../errors.ts";
import type { ColumnMap } from "../../rig/column-map.ts";

export interface TextRow {
  /** Without spaces around them. */
  readonly cells: readonly string[];
  /** Where the row ends in the file, counting from 1. */
  readonly line: number;
}

export interface CommentCount {
  comments: number;
}

const GZIP_MAGIC = [0x1f, 0x8b];
/** No row of a table is longer: a longer one is another kind of file. */
const MAX_ROW_CHARACTERS = 1_000_000;

const SEPARATORS = { ",": ",", ";": ";", tab: "\t", spaces: [" ", "\t"] } as const;
const ENCODINGS = { "utf-8": "utf8", "utf-16le": "utf16le", latin1: "latin1" } as const;

/**
 * Reads a file row by row; the header is not told apart here.
 * @param counted told how many comment lines there were, when the last row was read
 * @throws BendwatchError TABLE_INVALID when the file cannot be read, unpacked or split into cells
 */
export async function* readTextRows(
  file: string,
  format: ColumnMap["format"],
  counted: CommentCount,
): AsyncGenerator<TextRow> {
  const parser = parse(parserOptions(format));
  try {
    const unpack = isGzip(file) ? [createGunzip()] : [];
    // An error anywhere destroys the parser, and the loop below throws it.
    pipeline([createReadStream(file), ...unpack, parser], () => {});
    for await (const { record, info } of parser as AsyncIterable<{
      record: string[];
      info: { lines: number };
    }>) {
      const cells = format.separator === "spaces" ? record.filter((cell) => cell !== "") : record;
      yield { cells, line: info.lines };
    }
  } catch (cause) {
    throw unreadable(file, cause as Error);
  }
  counted.comments = parser.info.comment_lines;
}

function parserOptions(format: ColumnMap["format"]): Options {
  return {
    delimiter: [...SEPARATORS[format.separator]],
    encoding: ENCODINGS[format.encoding],
    from_line: format.preambleLines + 1,
    comment: format.commentPrefix ?? null,
    comment_no_infix: true,
    bom: true,
    info: true,
    trim: true,
    skip_empty_lines: true,
    relax_column_count: true,
    relax_quotes: true,
    max_record_size: MAX_ROW_CHARACTERS,
  };
}

function isGzip(file: string): boolean {
  const handle = openSync(file, "r");
  try {
    const start = new Uint8Array(GZIP_MAGIC.length);
    readSync(handle, start);
    return GZIP_MAGIC.every((byte, i) => start[i] === byte);
  } finally {
    closeSync(handle);
  }
}

function unreadable(file: string, cause: Error): BendwatchError {
  if (cause instanceof BendwatchError) return cause;
  const line = cause instanceof CsvError ? `, line ${cause.lines}` : "";
  return new BendwatchError(
    "TABLE_INVALID",
    { where: `${file}${line}`, found: cause.message, expected: "a table of text, plain or gzipped" },
    { cause },
  );
}
