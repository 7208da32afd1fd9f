import { readFileSync } from "node:fs";
import { join } from "node:path";
import { expect, test } from "vitest";
import { ADVICE, BendwatchError } from "../bridge/errors.ts";
import { packageRoot } from "../bridge/paths.ts";

test("DEVELOPERS.md lists exactly the error codes of the code", () => {
  const page = readFileSync(join(packageRoot, "DEVELOPERS.md"), "utf8");
  const section = page.slice(page.indexOf("## Errors"), page.indexOf("## Decisions"));
  const listed = [...section.matchAll(/^\| `([A-Z_]+)` +\|/gm)].map((match) => match[1]);
  expect(listed.sort()).toEqual(Object.keys(ADVICE).sort());
});

test("an error says where, what was found, what was expected and what to do", () => {
  const error = new BendwatchError("CONFIG_INVALID", [
    { where: "rig.json, body.lengthMm", found: '"640"', expected: "a number" },
    { where: "rig.json, colour", found: "an unknown key", expected: "only the keys of the schema" },
  ]);
  expect(error.message).toBe(
    [
      "CONFIG_INVALID",
      '  rig.json, body.lengthMm: found "640"; expected a number',
      "  rig.json, colour: found an unknown key; expected only the keys of the schema",
      `  ${ADVICE.CONFIG_INVALID}`,
    ].join("\n"),
  );
});
