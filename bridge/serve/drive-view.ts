/** What the dashboard shows of the body beside its drive and beside a camera. */
import type { Pipeline } from "../pipeline.ts";
import type { BesideView, CameraMessage, DriveMessage } from "../wire/messages.ts";

/** Digits sent: more than any reading has. */
const DIGITS = 5;

/** @returns null until the drive has given a reading */
export function driveMessage({ drive, newestReference, rig }: Pipeline): DriveMessage | null {
  const yaw = known(newestReference.yaw);
  const sway = known(newestReference.sway);
  if (yaw === null && sway === null) return null;
  const raw = { type: "drive", yaw, sway } as const;
  if (drive === null) {
    return { ...raw, named: false, nearest: 0, method: null, cycles: 0, windowS: 0, sensors: [], loop: null };
  }
  const { method, cycles, startS, endS, figures } = drive.comparison;
  const { gain, lagS, rmse, r2 } = figures;
  const loop = drive.loop(drive.nearestSensor);
  return {
    ...raw,
    named: true,
    nearest: drive.nearestSensor,
    method,
    cycles: method === "whole cycles" ? cycles.count : 0,
    windowS: known(endS - startS) ?? 0,
    sensors: rig.sensors.map((_, i) => viewOf(gain[i], lagS[i], rmse[i], r2[i])),
    loop: loop && {
      reference: loop.reference.map(short),
      measured: loop.measured.map(short),
      area: short(loop.area),
    },
  };
}

/** @returns null where no camera's midlines were loaded */
export function cameraMessage({ camera }: Pipeline): CameraMessage | null {
  if (camera === null) return null;
  const { gain, lagS, rmseM, r2 } = camera.overall();
  const overall = { gain: short(gain), lagS: short(lagS), rmseM: short(rmseM), r2: short(r2) };
  return { type: "camera", overall: Number.isFinite(gain + lagS + rmseM + r2) ? overall : null };
}

function viewOf(gain: number, lagS: number, rmse: number, r2: number): BesideView | null {
  const view = { gain: short(gain), lagS: short(lagS), rmse: short(rmse), r2: short(r2) };
  return Number.isFinite(gain + lagS + rmse + r2) ? view : null;
}

function known(value: number): number | null {
  return Number.isFinite(value) ? short(value) : null;
}

function short(value: number): number {
  return Number(value.toPrecision(DIGITS));
}
