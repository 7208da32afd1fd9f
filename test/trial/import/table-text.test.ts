import { gzipSync } from "node:zlib";
import { describe, expect, test } from "vitest";
import { readTextRows } from "../../../bridge/trial/import/table-text.ts";
import { mapOf, tableOf } from "./fixtures.ts";

async function read(content: string | Uint8Array, format: Record<string, unknown> = {}) {
  const rows: string[][] = [];
  const lines: number[] = [];
  const counted = { comments: 0 };
  for await (const { cells, line } of readTextRows(tableOf(content), mapOf({ format }).format, counted)) {
    rows.push([...cells]);
    lines.push(line);
  }
  return { rows, lines, ...counted };
}

const rows = [
  ["t", "a b"],
  ["1", "2"],
];

describe("a table file as cells", () => {
  test.each([
    [",", "t,a b\n1,2\n"],
    [";", "t; a b\r\n1 ;2"],
    ["tab", "t\ta b\n1\t2\n"],
    ["spaces", '  t   "a b"\n1\t 2  \n'],
  ])("is split at the separator %j, spaces around cells taken off", async (separator, text) => {
    expect((await read(text, { separator })).rows).toEqual(rows);
  });

  test("is unpacked when gzipped, whatever its name", async () => {
    expect((await read(gzipSync("t,a b\n1,2\n"))).rows).toEqual(rows);
  });

  test("a byte order mark is taken off and tells UTF-16 from UTF-8", async () => {
    expect((await read("\ufefft,a b\n1,2\n")).rows).toEqual(rows);
    expect((await read(Buffer.from("\ufefft,a b\n1,2\n", "utf16le"))).rows).toEqual(rows);
  });

  test("is decoded as the map says where there is no mark", async () => {
    const degrees = [["°"]];
    expect((await read("°\n")).rows).toEqual(degrees);
    expect((await read(Buffer.from("°\n", "latin1"), { encoding: "latin1" })).rows).toEqual(degrees);
    expect((await read(Buffer.from("°\n", "utf16le"), { encoding: "utf-16le" })).rows).toEqual(degrees);
  });

  test("preamble, comment and empty lines are skipped and every row keeps its line number", async () => {
    const text = 'Logger 3 "of 7\nanything, goes; here\nt,a b\n# pause\n\n1,2\n3,4 # not a comment\n';
    const found = await read(text, { preambleLines: 2, commentPrefix: "#" });
    expect(found.rows).toEqual([...rows, ["3", "4 # not a comment"]]);
    expect(found.lines).toEqual([3, 6, 7]);
    expect(found.comments).toBe(1);
  });
});

describe("a file that is no such table", () => {
  test("that does not exist is named", async () => {
    const missing = readTextRows("no/such/table.csv", mapOf().format, { comments: 0 });
    await expect(missing.next()).rejects.toMatchObject({
      code: "TABLE_INVALID",
      details: [{ where: "no/such/table.csv", found: expect.stringContaining("ENOENT") }],
    });
  });

  test("with an open quote is named with its line", async () => {
    await expect(read('t,a\n1,2\n3,"4\n')).rejects.toMatchObject({
      code: "TABLE_INVALID",
      details: [{ where: expect.stringMatching(/\.csv, line \d+$/), found: expect.stringMatching(/quote/i) }],
    });
  });

  test("cut off in the middle of its gzip stream is an error", async () => {
    const packed = gzipSync("t,a b\n1,2\n".repeat(1000));
    await expect(read(packed.subarray(0, packed.length - 9))).rejects.toMatchObject({
      code: "TABLE_INVALID",
    });
  });
});
