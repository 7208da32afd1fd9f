/**
 * Runs the benchmarks: `npm run bench` for all, `npm run bench -- fusion` for those whose name contains a word, `--json`
 * for one JSON document. Each benchmark is a module of this folder that exports `name` and `run`.
 */
import { readdirSync } from "node:fs";
import { cpus } from "node:os";

interface Bench {
  readonly name: string;
  run(): Promise<{ rows: Record<string, string | number>[]; json: unknown }>;
}

const asJson = process.argv.includes("--json");
const words = process.argv.slice(2).filter((word) => !word.startsWith("--"));
const machine = { cpu: cpus()[0]?.model ?? "unknown", cores: cpus().length, node: process.version };
const results: Record<string, unknown> = {};

if (!asJson) console.log(`${machine.cpu}, ${machine.cores} cores, Node ${machine.node}`);
for (const file of readdirSync(import.meta.dirname).sort()) {
  if (file === "run.ts" || !file.endsWith(".ts")) continue;
  const bench = (await import(`./${file}`)) as Partial<Bench>;
  if (bench.name === undefined || bench.run === undefined) continue;
  if (words.length > 0 && !words.some((word) => bench.name?.includes(word) || file.includes(word))) continue;
  const { rows, json } = await bench.run();
  results[bench.name] = json;
  if (asJson) continue;
  console.log(`\n${bench.name}`);
  console.table(rows);
}
if (asJson) console.log(JSON.stringify({ machine, results }, null, 2));
