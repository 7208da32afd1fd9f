/**
 * How many false flags there are in hours of healthy swimming: at most one in ten hours is allowed. Ten minutes a run,
 * six sensors at 100 Hz and sixteen at 200 Hz by turns.
 *
 *     npm run check:false-flags -- [hours, 10 unless given] [first seed, 1]
 *
 * Ends with code 1 when there were more.
 */
import { rehearse } from "../support/rehearse.ts";
import { healthySwimmer } from "./healthy.ts";

const RUN_S = 600;
const ALLOWED_PER_HOUR = 0.1;
const RIGS = ["ribbon-foil", "long-dummy"] as const;

const hours = Number(process.argv[2] ?? 10);
const firstSeed = Number(process.argv[3] ?? 1);
const runs = Math.ceil((hours * 3600) / RUN_S);
let found = 0;
for (let k = 0; k < runs; k++) {
  const seed = firstSeed + k;
  const rig = RIGS[k % RIGS.length]!;
  const { flags } = await rehearse({ rig, seed, durationS: RUN_S, swimmer: healthySwimmer(seed, RUN_S) });
  found += flags.length;
  console.log(`${(((k + 1) * RUN_S) / 3600).toFixed(1)} h, ${rig}, seed ${seed}: ${flags.length} flags`);
  for (const flag of flags)
    console.log(`   ${flag.startS.toFixed(1)} s  ${flag.kind} @${flag.sensor}: ${flag.detail}`);
}
const swum = (runs * RUN_S) / 3600;
console.log(`${found} false flags in ${swum.toFixed(1)} hours`);
if (found > Math.max(1, ALLOWED_PER_HOUR * swum)) process.exitCode = 1;
