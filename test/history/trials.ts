/** Rehearsed trials of one rig over weeks, as recordings: a body that lies for ten seconds and then swims. */
import { join } from "node:path";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig, type Rig } from "../../bridge/rig/load.ts";
import { TrialRecorder } from "../../bridge/trial/recorder.ts";

export const FIRST_MS = Date.UTC(2026, 5, 1, 9);
export const WEEK_MS = 7 * 86_400_000;

export interface TrialOptions {
  readonly startMs?: number;
  /** Added to the gyroscope of the sensor of that name on its own x axis, °/s. */
  readonly biasDegPerS?: Readonly<Record<string, number>>;
  /** Whether the rig's calibration knows that bias and takes it off. */
  readonly calibrated?: boolean;
  readonly restS?: number;
  /** Further changes of the rig as recorded. */
  readonly change?: (rig: Rig) => Rig;
}

/** The foil, its sensors with serial numbers F-1, F-2 ... */
export function serialRig(): Rig {
  const rig = loadRig("ribbon-foil");
  return { ...rig, sensors: rig.sensors.map((sensor, i) => ({ ...sensor, serial: `F-${i + 1}` })) };
}

/** Records a trial as `folder`/`name`. @returns its folder */
export async function recordTrial(
  folder: string,
  name: string,
  {
    startMs = FIRST_MS,
    biasDegPerS = {},
    calibrated = false,
    restS = 10,
    change = (rig) => rig,
  }: TrialOptions = {},
): Promise<string> {
  const rig = change(serialRig());
  // The rehearsal puts on what the rig's calibration takes off again.
  const swum: Rig = {
    ...rig,
    sensors: rig.sensors.map((sensor) => ({
      ...sensor,
      calibration: { ...sensor.calibration, gyroBiasDegPerS: [biasDegPerS[sensor.name] ?? 0, 0, 0] },
    })),
  };
  const path = join(folder, name);
  const recorder = await TrialRecorder.create({
    folder: path,
    rig: calibrated ? swum : rig,
    origin: { kind: "rehearsal", detail: name },
    softwareVersion: "0",
    startedAt: new Date(startMs),
  });
  const source = new RehearsalSource({
    rig: swum,
    swimmer: { restS },
    durationS: Math.max(restS, 1) + 2,
    rate: "max",
    startMs,
  });
  await source.run({
    bytes: (chunk, hostTimeMs) => recorder.bytes(chunk, hostTimeMs),
    linkState: (state, detail, hostTimeMs) => recorder.linkState(state, detail, hostTimeMs),
    mark() {},
  });
  await recorder.close("ended");
  return path;
}
