/**
 * Real recordings of a three-segment pendulum, one nine-axis unit a segment, with the optical orientation of each
 * segment: five of the recordings of A. Szczęsna, P. Skurowski, P. Pruszowski, D. Pęszor, M. Paszkuta, K. Wojciechowski,
 * "Reference Data Set for Accuracy Evaluation of Orientation Estimation Algorithms for Inertial Motion Capture
 * Systems", ICCVG 2016. Not part of the project: found where present.
 *
 * Scored is the rotation between neighbouring segments. The frames of unit and cameras differ by a constant rotation on
 * either side, measured = A optical B, which is solved for first, segment by segment.
 */
import { existsSync, readdirSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";
import { encodeTextLine } from "../../bridge/link/text.ts";
import { conjugate, multiply, normalise } from "../../bridge/numeric/quaternion.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { Pipeline } from "../../bridge/pipeline.ts";
import { columnMapSchema } from "../../bridge/rig/column-map.ts";
import { loadConfig, type Rig } from "../../bridge/rig/load.ts";
import { importedRig, importTables } from "../../bridge/trial/import/tables.ts";

/** The fusion has settled by then, s. */
const LEFT_OUT_S = 3;
const SEGMENTS = 3;
/** One sweep in so many is compared: the cameras are three times as fast as the units. */
const EVERY = 3;

/** The folder of these recordings under the open-data folder, or null when it is not there. */
export function pendulumFolder(openData: string): string | null {
  const folder = join(openData, "pendulum");
  return existsSync(folder) && pendulumNames(folder).length > 0 ? folder : null;
}

/** Names of all recordings in motion that have a table for every segment; at rest no frames can be solved for. */
export function pendulumNames(folder: string): string[] {
  const files = readdirSync(folder);
  return files
    .filter((file) => file.endsWith("_Segment_1.csv.gz") && !file.includes("_Static_"))
    .map((file) => file.replace("_Segment_1.csv.gz", ""))
    .filter((name) => [2, 3].every((n) => files.includes(`${name}_Segment_${n}.csv.gz`)))
    .sort();
}

/** A recording brought onto common times: orientations of each segment, measured and optical, 4 a moment. */
interface Pair {
  readonly measured: readonly Float64Array[];
  readonly optical: readonly Float64Array[];
}

/**
 * Imports a recording as a three-sensor trial, runs it through the whole pipeline and compares.
 * @returns RMS of the angle between measured and optical relative rotation, degrees, for each joint
 */
export async function scorePendulum(folder: string, name: string, rig: Rig): Promise<number[]> {
  const paths = Array.from({ length: SEGMENTS }, (_, i) => join(folder, `${name}_Segment_${i + 1}.csv.gz`));
  const tables = paths.map(readReference);
  const startS = Math.min(...tables.map(([first]) => first![0]!));
  const optical = tables.map((rows) => new Map(rows.map((row) => [microseconds(row[0]! - startS), row])));
  const pairs: Pair[] = optical.map(() => ({ measured: [], optical: [] }));
  let moments = 0;
  for (const [timeUs, orientations] of await orientationsOf(paths, rig)) {
    const rows = optical.map((ofSegment) => ofSegment.get(timeUs));
    if (timeUs < LEFT_OUT_S * 1e6 || rows.includes(undefined) || moments++ % EVERY !== 0) continue;
    pairs.forEach((pair, segment) => {
      (pair.measured as Float64Array[]).push(orientations.slice(4 * segment, 4 * segment + 4));
      (pair.optical as Float64Array[]).push(Float64Array.from(rows[segment]!.slice(1)));
    });
  }
  const inOpticalFrames = pairs.map(framesSolved);
  return [0, 1].map((joint) =>
    rms(
      inOpticalFrames[joint]!.map((q, i) => {
        const ours = product(inverse(q), inOpticalFrames[joint + 1]![i]!);
        const theirs = product(inverse(pairs[joint]!.optical[i]!), pairs[joint + 1]!.optical[i]!);
        return angle(product(inverse(theirs), ours));
      }),
    ),
  );
}

const microseconds = (seconds: number) => Math.round(seconds * 1e6);

/** All orientations, 4 a sensor, by hub time in µs. */
async function orientationsOf(paths: string[], rig: Rig): Promise<Map<number, Float64Array>> {
  const lines: { chunk: Uint8Array; hostTimeMs: number }[] = [];
  await importTables(
    {
      files: paths.map((path) => ({ path })),
      columnMap: loadConfig("columns", "three-segment-pendulum", columnMapSchema),
      rig,
      encodeLine: (sweep) => encodeTextLine(sweep, rig.models),
    },
    { bytes: (chunk, hostTimeMs) => lines.push({ chunk: chunk.slice(), hostTimeMs }) },
  );
  const found = new Map<number, Float64Array>();
  const pipeline: Pipeline = new Pipeline(importedRig(rig), {
    startedAt: new Date(0),
    ring: false,
    observer: {
      sweep: ({ timeS }) => found.set(microseconds(timeS), pipeline.fusion.orientations.slice()),
    },
  });
  for (const { chunk, hostTimeMs } of lines) pipeline.bytes(chunk, hostTimeMs);
  return found;
}

/** Time and reference quaternion of every row. */
function readReference(path: string): number[][] {
  const rows = gunzipSync(readFileSync(path)).toString("latin1").split(/\r?\n/).slice(2);
  return rows.map((row) => row.split(";").slice(0, 5).map(Number)).filter((row) => row.length === 5);
}

/**
 * A segment's measured orientations in the frames of the cameras: the constant rotations A and B of
 * measured = A optical B are solved for in turn, each as the mean of what the other leaves, until neither moves; from
 * several starts, since there are false minima.
 */
function framesSolved({ measured, optical }: Pair): Float64Array[] {
  let best = { a: STARTS[0]!, b: STARTS[0]!, error: Infinity };
  for (const start of STARTS) {
    const found = solveFrames(measured, optical, start, FIRST_ROUNDS);
    if (found.error < best.error) best = found;
  }
  const { a, b } = solveFrames(measured, optical, best.b, LAST_ROUNDS);
  return measured.map((q) => product(product(inverse(a), q), inverse(b)));
}

function solveFrames(
  measured: readonly Float64Array[],
  optical: readonly Float64Array[],
  start: Float64Array,
  rounds: number,
): { a: Float64Array; b: Float64Array; error: number } {
  let a = start;
  let b = start;
  for (let round = 0; round < rounds; round++) {
    a = meanRotation(measured.map((q, i) => product(q, inverse(product(optical[i]!, b)))));
    b = meanRotation(measured.map((q, i) => product(inverse(product(a, optical[i]!)), q)));
  }
  const left = measured.map((q, i) => angle(product(inverse(product(product(a, optical[i]!), b)), q)));
  return { a, b, error: rms(left) };
}

/** Rounds from each start, enough to tell the best from the others, and from the best one, until nothing moves. */
const FIRST_ROUNDS = 4;
const LAST_ROUNDS = 60;
/** The 24 turns that take a cube onto itself: any rotation is within 63° of one of them. */
const STARTS = cubeTurns();

function cubeTurns(): Float64Array[] {
  const half = [-1, 0, 1];
  const all = half.flatMap((w) => half.flatMap((x) => half.flatMap((y) => half.map((z) => [w, x, y, z]))));
  // One, two or all four parts that differ from zero, the first of them positive: 4 + 12 + 8 turns.
  const turns = all.filter((q) => {
    const parts = q.filter((part) => part !== 0);
    return [1, 2, 4].includes(parts.length) && parts[0]! > 0;
  });
  return turns.map((q) => {
    const unit = Float64Array.from(q);
    normalise(unit, unit);
    return unit;
  });
}

/** Of a rotation, degrees. */
const angle = (q: Float64Array) => 2 * Math.acos(Math.min(1, Math.abs(q[0]!))) * DEG_PER_RAD;

const rms = (values: readonly number[]) =>
  Math.sqrt(values.reduce((sum, value) => sum + value * value, 0) / values.length);

function product(a: Float64Array, b: Float64Array): Float64Array {
  const out = new Float64Array(4);
  multiply(out, a, b);
  return out;
}

function inverse(a: Float64Array): Float64Array {
  const out = new Float64Array(4);
  conjugate(out, a);
  return out;
}

/** Rotations that lie close together, averaged as quaternions of one sign. */
function meanRotation(rotations: readonly Float64Array[]): Float64Array {
  const sum = new Float64Array(4);
  for (const q of rotations) {
    const dot = q[0]! * sum[0]! + q[1]! * sum[1]! + q[2]! * sum[2]! + q[3]! * sum[3]!;
    for (let i = 0; i < 4; i++) sum[i]! += dot < 0 ? -q[i]! : q[i]!;
  }
  normalise(sum, sum);
  return sum;
}
