/**
 * Runs the benchmarks: `npm run bench` for all, `npm run bench -- fusion` for those whose name contains a word, `--json`
 * for one JSON document. Each benchmark is a module of this folder that exports `name` and `run`; the figures are held
 * against budgets.json. Measure on a machine that does nothing else.
 */
import { readdirSync, readFileSync } from "node:fs";
import { cpus, loadavg } from "node:os";
import { join } from "node:path";

interface Bench {
  readonly name: string;
  run(): Promise<{ rows: Record<string, string | number>[]; json: unknown }>;
}

interface Budget {
  /** The benchmark's file, without .ts. */
  readonly bench: string;
  /** Path of the figure within the benchmark's JSON. */
  readonly figure: readonly string[];
  readonly atLeast?: number;
  readonly atMost?: number;
  readonly says: string;
}

const asJson = process.argv.includes("--json");
const words = process.argv.slice(2).filter((word) => !word.startsWith("--"));
const machine = {
  cpu: cpus()[0]?.model ?? "unknown",
  cores: cpus().length,
  node: process.version,
  load: loadavg()[0],
};
const folder = import.meta.dirname;
const results: Record<string, unknown> = {};

say(
  `${machine.cpu}, ${machine.cores} cores, Node ${machine.node}, load ${machine.load?.toFixed(1)} at the start`,
);
for (const file of readdirSync(folder).sort()) {
  if (file === "run.ts" || !file.endsWith(".ts")) continue;
  const bench = (await import(`./${file}`)) as Partial<Bench>;
  if (bench.name === undefined || bench.run === undefined) continue;
  if (words.length > 0 && !words.some((word) => bench.name?.includes(word) || file.includes(word))) continue;
  const { rows, json } = await bench.run();
  results[file.replace(/\.ts$/, "")] = json;
  say(`\n${bench.name}`);
  if (!asJson) console.table(rows);
}
const budgets = held(JSON.parse(readFileSync(join(folder, "budgets.json"), "utf8")) as Budget[]);
say("\nBudgets");
if (asJson) console.log(JSON.stringify({ machine, results, budgets }, null, 2));
else console.table(budgets);
process.exit();

function say(line: string): void {
  if (!asJson) console.log(line);
}

/** Budgets of what was run, with what was measured. */
function held(all: readonly Budget[]) {
  return all
    .filter(({ bench }) => bench in results)
    .map(({ bench, figure, atLeast, atMost, says }) => {
      let value: unknown = results[bench];
      for (const key of figure) value = (value as Record<string, unknown>)[key];
      const measured = Number(value);
      const kept =
        measured >= (atLeast ?? Number.NEGATIVE_INFINITY) && measured <= (atMost ?? Number.POSITIVE_INFINITY);
      const budget = atLeast === undefined ? `at most ${atMost}` : `at least ${atLeast}`;
      return { says, measured: Number(measured.toPrecision(4)), budget, kept: kept ? "yes" : "NO" };
    });
}
