/**
 * A process that records until it is killed: a chunk of 32 counting bytes every 5 ms. It says "<bytes sent>" on stdout
 * after each chunk, so that the test knows what it had handed to the recorder by when.
 */
import { loadRig } from "../../bridge/rig/load.ts";
import { TrialRecorder } from "../../bridge/trial/recorder.ts";

const recorder = await TrialRecorder.create({
  folder: process.argv[2]!,
  rig: loadRig("ribbon-foil"),
  origin: { kind: "rehearsal", detail: "counting bytes" },
  softwareVersion: "0.1.0",
  startedAt: new Date(),
});
let sent = 0;
setInterval(() => {
  recorder.bytes(
    Uint8Array.from({ length: 32 }, (_, i) => (sent + i) & 255),
    Date.now(),
  );
  sent += 32;
  process.stdout.write(`${sent}\n`);
}, 5);
