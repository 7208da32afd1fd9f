/**
 * The simulated hub: turns the rig's sweeps and its own slow packets into the bytes that leave its port, in order of
 * time, as fast as the port's baud rate lets them. Chunks end where the moment ends, mid-packet as often as not.
 */
import { NativeEncoder } from "../link/native-encoder.ts";
import type { HubHello } from "../link/packets.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import type { Rig } from "../rig/load.ts";
import { OutPort } from "./out-port.ts";
import type { SimulatedRig } from "./simulated-rig.ts";

const HELLO_PERIOD_S = 1;
const STATUS_PERIOD_S = 0.5;
const REFERENCE_PERIOD_S = 0.02;

/** Status fault bit: buffer overrun (as in link/packets.ts). */
const OVERRUN = 4;

const SUPPLY_V = 5.05;
const TEMPERATURE_C = 21;

export interface SimulatedHubOptions {
  readonly rig: Rig;
  readonly simulated: SimulatedRig;
  /** Tick of the first sweep, µs; ticks wrap after 2^32. */
  readonly firstTickUs: number;
  /** Camera frame pulses a second; 0 for none. */
  readonly syncHz: number;
  /** How long the body follows after the drive, s. */
  readonly driveLagS: number;
}

/** Something the hub does at even intervals. */
interface Routine {
  readonly periodS: number;
  /** How often it has been done. */
  count: number;
  readonly send: (timeS: number) => void;
}

export class SimulatedHub {
  readonly #rig: Rig;
  readonly #simulated: SimulatedRig;
  readonly #hello: HubHello;
  readonly #routines: readonly Routine[];
  readonly #restartsS: number[];
  readonly #driveLagS: number;

  #encoder: NativeEncoder;
  #tickOriginS = 0;
  #tickAtOriginUs: number;
  #edges = 0;
  #overrun = false;
  /** Sweeps on their way, and how many have yet to overtake each. */
  #overtaken: { readonly frame: Uint8Array; readonly ahead: number }[] = [];
  readonly #port: OutPort;

  constructor({ rig, simulated, firstTickUs, syncHz, driveLagS }: SimulatedHubOptions) {
    this.#rig = rig;
    this.#port = new OutPort(rig.hub.baudRate);
    this.#simulated = simulated;
    this.#driveLagS = driveLagS;
    this.#tickAtOriginUs = firstTickUs;
    this.#restartsS = simulated.effects.flatMap(({ restartS }) => restartS ?? []).sort((a, b) => a - b);
    this.#hello = {
      tickUs: 0,
      rateHz: rig.hub.rateHz,
      hubSerial: "rehearsal",
      sensors: simulated.scales.map((scales, i) => ({ ...scales, serial: rig.sensors[i].serial })),
    };
    this.#encoder = new NativeEncoder(this.#hello);
    const every = (periodS: number, send: (timeS: number) => void): Routine => ({ periodS, count: 0, send });
    this.#routines = [
      every(HELLO_PERIOD_S, (timeS) => this.#queue(timeS, this.#encoder.hello(this.#tickUs(timeS)))),
      every(STATUS_PERIOD_S, (timeS) => this.#sendStatus(timeS)),
      every(1 / rig.hub.rateHz, (timeS) => this.#sendSweep(timeS)),
      ...(rig.reference !== undefined || rig.body.kind === "foil"
        ? [every(REFERENCE_PERIOD_S, (timeS) => this.#sendReference(timeS))]
        : []),
      ...(syncHz > 0 ? [every(1 / syncHz, (timeS) => this.#sendSync(timeS))] : []),
    ];
  }

  /**
   * Does all that is due before `timeS` and gives the bytes that have left the port since the last call.
   * Borrowed: valid until the next call.
   */
  advanceTo(timeS: number): Uint8Array {
    for (let next = this.#nextDue(); next.count * next.periodS < timeS; next = this.#nextDue()) {
      const dueS = next.count * next.periodS;
      this.#restartIfDue(dueS);
      next.send(dueS);
      next.count++;
    }
    return this.#port.take(timeS);
  }

  /** The routine whose turn is next; of those due together, the first listed. */
  #nextDue(): Routine {
    let next = this.#routines[0];
    for (const routine of this.#routines) {
      if (routine.count * routine.periodS < next.count * next.periodS) next = routine;
    }
    return next;
  }

  #tickUs(timeS: number): number {
    let aheadS = 0;
    for (const effect of this.#simulated.effects) aheadS += effect.tickAheadS?.(timeS) ?? 0;
    return (this.#tickAtOriginUs + Math.round((timeS - this.#tickOriginS + aheadS) * 1e6)) >>> 0;
  }

  #restartIfDue(timeS: number): void {
    while (this.#restartsS.length > 0 && this.#restartsS[0] <= timeS) {
      this.#tickOriginS = this.#restartsS.shift() ?? timeS;
      this.#tickAtOriginUs = 0;
      this.#edges = 0;
      this.#encoder = new NativeEncoder(this.#hello);
      this.#queue(timeS, this.#encoder.hello(this.#tickUs(timeS)));
    }
  }

  #sendSweep(timeS: number): void {
    const sweep = this.#simulated.sweep(Math.round(timeS * this.#rig.hub.rateHz));
    sweep.tickUs = this.#tickUs(timeS);
    const frame = this.#encoder.sweep(sweep); // a lost sweep still counts
    let copies = 1;
    let ahead = 0;
    for (const effect of this.#simulated.effects) {
      if (effect.losesSweep?.(timeS) === true) copies = 0;
      if (copies > 0 && effect.repeatsSweep?.(timeS) === true) copies++;
      ahead = Math.max(ahead, effect.sweepsAhead?.(timeS) ?? 0);
    }
    if (ahead > 0) this.#overtaken.push({ frame: frame.slice(), ahead });
    else for (let copy = 0; copy < copies; copy++) this.#queue(timeS, frame);
    this.#sendOvertaken(timeS);
  }

  /** Sends the sweeps that as many have overtaken as should. */
  #sendOvertaken(timeS: number): void {
    if (this.#overtaken.length === 0) return;
    for (const { frame, ahead } of this.#overtaken) if (ahead === 0) this.#queue(timeS, frame);
    this.#overtaken = this.#overtaken
      .filter(({ ahead }) => ahead > 0)
      .map(({ frame, ahead }) => ({ frame, ahead: ahead - 1 }));
  }

  #sendStatus(timeS: number): void {
    const status = {
      tickUs: this.#tickUs(timeS),
      supplyV: SUPPLY_V,
      temperatureC: TEMPERATURE_C,
      faults: this.#overrun ? OVERRUN : 0,
    };
    this.#overrun = false;
    for (const effect of this.#simulated.effects) effect.changeStatus?.(timeS, status);
    this.#queue(timeS, this.#encoder.status(status));
  }

  /** As the drive's own counter has it: the inverse of what the rig file puts right. */
  #sendReference(timeS: number): void {
    const { reference } = this.#rig;
    const takenS = timeS - (reference?.delayMs ?? 0) / 1000;
    const drive = this.#simulated.driveAt(takenS + this.#driveLagS);
    const yaw = drive.yaw * (reference?.yawReversed ? -1 : 1) + (reference?.yawZeroDeg ?? 0) * RAD_PER_DEG;
    const sway = drive.sway * (reference?.swayReversed ? -1 : 1) + (reference?.swayZeroMm ?? 0) / 1000;
    this.#queue(timeS, this.#encoder.reference({ tickUs: this.#tickUs(timeS), yaw, sway }));
  }

  #sendSync(timeS: number): void {
    this.#queue(timeS, this.#encoder.sync({ tickUs: this.#tickUs(timeS), edge: this.#edges++ }));
  }

  #queue(timeS: number, frame: Uint8Array): void {
    const { effects } = this.#simulated;
    for (const effect of effects) effect.damage?.(timeS, frame);
    if (effects.some((effect) => effect.isDark?.(timeS))) return;
    if (!this.#port.put(timeS, frame)) this.#overrun = true;
  }
}
