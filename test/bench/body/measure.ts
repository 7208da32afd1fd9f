/**
 * Measures one sweep's body and wave stages (rhythm, midline, travel axis, head motion, gait: all that pipeline.ts runs
 * between fusion and drive) beside its fusion, on the sweeps of one rehearsal, and prints the result as JSON. Rounds are
 * short and alternate, so that whatever else the machine does hits both alike; the best round is the time without it.
 */
import { Pipeline } from "../../../bridge/pipeline.ts";
import { RehearsalSource } from "../../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig } from "../../../bridge/rig/load.ts";
import { createSweep, type Sweep } from "../../../bridge/sweep.ts";
import { START_MS } from "../../support/rehearse.ts";

const SECONDS = 20;
/** Two beats, so that every round bears the ends of beats, where a cycle's numbers are computed. */
const SWEEPS_A_ROUND = 400;
const WARM_UP_ROUNDS = 40;
const ROUNDS = 400;

export interface Measured {
  readonly sensors: number;
  /** µs a sweep. */
  readonly fusion: { readonly best: number; readonly median: number };
  readonly body: { readonly best: number; readonly median: number };
  /** Bytes by which the heap grows in a sweep of body and wave, and what of them a collection leaves. */
  readonly bodyHeapBytes: number;
  readonly bodyHeapBytesLeft: number;
  /** What the midline is made by at the end. */
  readonly midlineBy: string;
}

interface Taken {
  readonly sweep: Sweep;
  readonly orientations: Float64Array;
  readonly trust: Uint8Array;
}

const rig = loadRig("long-dummy");
const taken: Taken[] = [];
const recording: Pipeline = new Pipeline(rig, {
  startedAt: new Date(START_MS),
  ring: false,
  observer: {
    sweep(sweep) {
      const { orientations, trust } = recording.fusion;
      taken.push({ sweep: copyOf(sweep), orientations: orientations.slice(), trust: trust.slice() });
    },
  },
});
const source = new RehearsalSource({ rig, rate: "max", startMs: START_MS, durationS: SECONDS });
await source.run({
  bytes: (chunk, hostTimeMs) => recording.bytes(chunk, hostTimeMs),
  linkState() {},
  mark() {},
});

const { fusion, rhythm, midline, travel, headMotion, tailbeat, gait } = new Pipeline(rig, {
  startedAt: new Date(START_MS),
  ring: false,
});
let fused = 0;
let shaped = 0;

function fuse(): void {
  for (let i = 0; i < SWEEPS_A_ROUND; i++, fused++) {
    const { sweep } = taken[fused % taken.length]!;
    // Going round, time goes on.
    sweep.timeS = fused / rig.hub.rateHz;
    fusion.step(sweep);
  }
}

function shape(): void {
  for (let i = 0; i < SWEEPS_A_ROUND; i++, shaped++) {
    const { sweep, orientations, trust } = taken[shaped % taken.length]!;
    rhythm.step(sweep, orientations, trust);
    midline.step(orientations, trust, sweep.stepS, rhythm);
    travel.step(sweep.stepS, midline.positions, tailbeat.periodS);
    headMotion?.step(sweep, orientations, trust, rhythm, travel.direction, midline.positions);
    gait.step(shaped / rig.hub.rateHz, midline.positions, travel.direction, trust);
  }
}

const fusionUs: number[] = [];
const bodyUs: number[] = [];
for (let round = 0; round < WARM_UP_ROUNDS + ROUNDS; round++) {
  fusionUs.push(usASweep(fuse));
  bodyUs.push(usASweep(shape));
}
const heapBytes = bytesASweep(shape);
const heapBytesLeft = bytesLeftASweep(shape);
const measured: Measured = {
  sensors: rig.sensors.length,
  fusion: summary(fusionUs.slice(WARM_UP_ROUNDS)),
  body: summary(bodyUs.slice(WARM_UP_ROUNDS)),
  bodyHeapBytes: heapBytes,
  bodyHeapBytesLeft: heapBytesLeft,
  midlineBy: midline.inUse,
};
console.log(JSON.stringify(measured));

function copyOf(sweep: Sweep): Sweep {
  const copy = createSweep(sweep.sensorCount);
  copy.timeS = sweep.timeS;
  copy.stepS = sweep.stepS;
  copy.values.set(sweep.values);
  copy.present.set(sweep.present);
  return copy;
}

function usASweep(round: () => void): number {
  const start = process.hrtime.bigint();
  round();
  return Number(process.hrtime.bigint() - start) / (1000 * SWEEPS_A_ROUND);
}

/** Smallest of several rounds: collections in between would hide growth, never raise it. */
function bytesASweep(round: () => void): number {
  const growths = Array.from({ length: 20 }, () => {
    const before = process.memoryUsage().heapUsed;
    round();
    return process.memoryUsage().heapUsed - before;
  });
  return Math.min(...growths.filter((growth) => growth >= 0)) / SWEEPS_A_ROUND;
}

/** Run with --expose-gc. The smaller of two: in the first, code is still being compiled. */
function bytesLeftASweep(round: () => void): number {
  return Math.min(leftOf(round), leftOf(round));
}

function leftOf(round: () => void): number {
  globalThis.gc!();
  const before = process.memoryUsage().heapUsed;
  const rounds = 50;
  for (let i = 0; i < rounds; i++) round();
  globalThis.gc!();
  return (process.memoryUsage().heapUsed - before) / (rounds * SWEEPS_A_ROUND);
}

function summary(times: readonly number[]) {
  const sorted = [...times].sort((a, b) => a - b);
  return { best: sorted[0]!, median: sorted[sorted.length >> 1]! };
}
