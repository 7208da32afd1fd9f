/** Time of a sweep's body and wave stages beside its fusion, on the same sweeps in the same run, and their heap bytes. */
import type { Measured } from "./body/measure.ts";
import { runBundled } from "./bundled.ts";

export const name = "body and wave against fusion";

export async function run(): Promise<{ rows: Record<string, string | number>[]; json: unknown }> {
  const measured = await runBundled<Measured>("body/measure.ts", ["--expose-gc"]);
  const { sensors, fusion, body } = measured;
  const row = (stages: string, { best, median }: Measured["body"]) => ({
    stages: `${stages}, ${sensors} sensors`,
    "best µs a sweep": Number(best.toFixed(2)),
    "median µs": Number(median.toFixed(2)),
    "ratio of best": Number((best / fusion.best).toFixed(2)),
  });
  const bytes = {
    "heap bytes a sweep": Number(measured.bodyHeapBytes.toFixed(1)),
    "of them left": Number(measured.bodyHeapBytesLeft.toFixed(2)),
  };
  return {
    rows: [row("fusion", fusion), { ...row(`body and wave (${measured.midlineBy})`, body), ...bytes }],
    json: { ...measured, ratioOfBest: body.best / fusion.best },
  };
}
