/**
 * A camera's midlines for a replay or an export: the trial is run through once to find when each frame was taken and where
 * the bridge's midline was, then the camera's are laid upon it.
 */
import { type Alignment, AlignmentSums, CameraTrack } from "../drive/camera-track.ts";
import { COMPARED_PLACES, COMPARED_STATIONS, stationsFromNoseInto } from "../drive/stations.ts";
import { BendwatchError } from "../errors.ts";
import { Pipeline } from "../pipeline.ts";
import { type CameraTable, readCameraTable } from "../trial/import/camera-table.ts";
import type { Manifest } from "../trial/manifest.ts";
import { runThrough } from "./run-through.ts";

/** The alignment looks at no more midlines than this a second of the trial. */
const LOOKS_HZ = 50;
/** A camera's midlines that fit this much better mirrored were counted with y to the right. */
const MIRRORED_SHARE = 0.5;
/** A body that hardly bends fits either way: only beyond this distance, as a share of its length, is one called wrong. */
const MIRRORED_LEAST_SHARE = 0.01;

export interface Camera {
  readonly track: CameraTrack;
  readonly alignment: Alignment;
  readonly frames: number;
  /** Frames without a whole midline, or without a pulse of their count. */
  readonly leftOut: number;
}

interface Seen {
  /** Hub times of the pulses, by their count; more than one after a restart of the hub. */
  readonly edges: Map<number, number[]>;
  readonly timeS: number[];
  /** x and y of the compared stations, one array a time. */
  readonly midlines: Float64Array[];
}

/**
 * Reads a camera's table and lays its midlines upon those of the trial.
 * @throws BendwatchError TABLE_INVALID where the table does not hold together, or does not belong to this trial
 */
export async function loadCamera(file: string, folder: string, manifest: Manifest): Promise<Camera> {
  const table = await readCameraTable(file);
  const seen = look(folder, manifest);
  const { timeS, points, unmatched } = timed(file, table, seen.edges);
  const lengthM = manifest.rig.body.lengthMm / 1000;
  const track = new CameraTrack({ timeS, stations: table.stations, points }, COMPARED_PLACES, lengthM);
  const alignment = alignmentOf(file, track, seen, lengthM);
  track.align(alignment);
  return { track, alignment, frames: timeS.length, leftOut: table.leftOut + unmatched };
}

function look(folder: string, { rig, startedAt }: Manifest): Seen {
  const seen: Seen = { edges: new Map(), timeS: [], midlines: [] };
  const pipeline: Pipeline = new Pipeline(rig, {
    startedAt: new Date(startedAt),
    ring: false,
    observer: {
      sweep({ timeS }) {
        if (timeS - (seen.timeS.at(-1) ?? Number.NEGATIVE_INFINITY) < 1 / LOOKS_HZ) return;
        const midline = new Float64Array(2 * COMPARED_STATIONS);
        stationsFromNoseInto(midline, pipeline.midline.positions);
        seen.timeS.push(timeS);
        seen.midlines.push(midline);
      },
      sync(timeS, edge) {
        seen.edges.set(edge, [...(seen.edges.get(edge) ?? []), timeS]);
      },
    },
  });
  runThrough(folder, pipeline);
  return seen;
}

/** The frames' hub times: as the table has them, or those of their pulses. */
function timed(
  file: string,
  { clock, when, lines, stations, points }: CameraTable,
  edges: Seen["edges"],
): { timeS: Float64Array; points: Float64Array; unmatched: number } {
  if (clock === "time_s") return { timeS: when, points, unmatched: 0 };
  const times: number[] = [];
  const kept: number[] = [];
  when.forEach((frame, i) => {
    const pulses = edges.get(frame) ?? [];
    if (pulses.length > 1) {
      throw wrong(
        `${file}, line ${lines[i]}, column frame`,
        `${frame}, and ${pulses.length} pulses of that count: the hub restarted`,
        "time_s instead of frame",
      );
    }
    if (pulses.length === 0) return;
    times.push(pulses[0]);
    kept.push(i);
  });
  if (times.length < 4) {
    const found = `${when.length} frames, ${times.length} of them with a pulse among the trial's ${edges.size}`;
    throw wrong(`${file}, column frame`, found, "the pulses' counts, as in the export's sync table");
  }
  const width = 2 * stations.length;
  const whole = new Float64Array(kept.length * width);
  kept.forEach((frame, i) => {
    whole.set(points.subarray(frame * width, (frame + 1) * width), i * width);
  });
  return { timeS: Float64Array.from(times), points: whole, unmatched: when.length - kept.length };
}

function alignmentOf(
  file: string,
  track: CameraTrack,
  { timeS, midlines }: Seen,
  lengthM: number,
): Alignment {
  const sums = new AlignmentSums();
  const camera = new Float64Array(2 * COMPARED_STATIONS);
  timeS.forEach((time, i) => {
    if (track.pointsInto(camera, time)) sums.add(camera, midlines[i]);
  });
  const alignment = sums.solve();
  if (alignment === null) {
    const span = (times: ArrayLike<number>) =>
      `${(times[0] ?? 0).toFixed(3)} to ${(times[times.length - 1] ?? 0).toFixed(3)} s`;
    throw wrong(
      file,
      `frames from ${span(track.timeS)}`,
      `frames within the trial, ${span(timeS)} of hub time`,
    );
  }
  const far = alignment.residualM > MIRRORED_LEAST_SHARE * lengthM;
  if (far && alignment.mirroredResidualM < MIRRORED_SHARE * alignment.residualM) {
    throw wrong(
      `${file}, y columns`,
      "midlines that fit only when mirrored",
      "y to the left of x as seen from above (rows of a picture count the other way: change the sign of y)",
    );
  }
  return alignment;
}

function wrong(where: string, found: string, expected: string): BendwatchError {
  return new BendwatchError("TABLE_INVALID", { where, found, expected });
}
