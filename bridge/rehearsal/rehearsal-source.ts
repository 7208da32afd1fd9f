/**
 * A rehearsal as a source of bytes: a simulated rig whose hub sends native packets, live, at any speed, or as fast as the
 * machine can. Nothing later can tell it from a serial port. The same options give the same bytes.
 */
import { BendwatchError } from "../errors.ts";
import type { ByteSink, ByteSource } from "../link/source.ts";
import type { Rig } from "../rig/load.ts";
import { type Fault, parseFault } from "./faults.ts";
import { SimulatedHub } from "./simulated-hub.ts";
import { EARTH_FIELD_UT, SimulatedRig, type Truth } from "./simulated-rig.ts";
import { STEADY_SWIMMER, type SwimmerOptions } from "./swimmer-options.ts";
import type { Unrest } from "./unrest.ts";

/** Bytes are handed over this often, s of rehearsal: as a serial port's driver does. */
const CHUNK_S = 0.004;
/** Longest stretch of work before others get a turn, ms. */
const TURN_MS = 8;

export interface RehearsalClock {
  /** ms since the epoch. */
  now(): number;
  /** Resolves after `ms`; 0 gives others a turn. */
  wait(ms: number): Promise<void>;
}

const machineClock: RehearsalClock = {
  now: () => Date.now(),
  wait: (ms) =>
    new Promise((resolve) => {
      if (ms > 0) setTimeout(resolve, ms);
      else setImmediate(resolve);
    }),
};

export interface RehearsalOptions {
  readonly rig: Rig;
  /** Seed of all random numbers. */
  readonly seed?: number;
  /** Requests as in faults.ts. */
  readonly faults?: readonly string[];
  /** What differs from a steady swimmer. */
  readonly swimmer?: Partial<SwimmerOptions>;
  /** Wandering biases and fields, for tests of headings. */
  readonly unrest?: Unrest;
  /** Endless unless given, s. */
  readonly durationS?: number;
  /** Times real time, or as fast as possible. */
  readonly rate?: number | "max";
  /** Host time of the start at rate "max", ms since the epoch: arrival times are then simulated ones. */
  readonly startMs?: number;
  readonly clock?: RehearsalClock;
  /** Hub tick of the first sweep, µs. */
  readonly firstTickUs?: number;
  /** Camera frame pulses a second; none unless given. */
  readonly syncHz?: number;
  /** How long the body follows after the drive, s; not at all unless given. */
  readonly driveLagS?: number;
  /** µT, earth axes. */
  readonly earthFieldUT?: readonly number[];
}

export class RehearsalSource implements ByteSource {
  readonly kind = "rehearsal";
  readonly label: string;

  readonly #options: RehearsalOptions;
  readonly #faults: readonly Fault[];
  readonly #truth: SimulatedRig;
  readonly #clock: RehearsalClock;
  readonly #rate: number;
  #stopping = false;
  #running: Promise<void> = Promise.resolve();

  /** @throws BendwatchError COMMAND_INVALID for a fault or an amplitude that cannot be, MISUSE for a rate that is none */
  constructor(options: RehearsalOptions) {
    const { rig, faults = [], rate = 1 } = options;
    this.label = `rehearsal of ${rig.name}`;
    this.#options = options;
    const names = rig.sensors.map((sensor) => sensor.name);
    this.#faults = faults.map((text) => parseFault(text, names));
    this.#truth = this.#simulate();
    this.#clock = options.clock ?? machineClock;
    this.#rate = rate === "max" ? Number.POSITIVE_INFINITY : rate;
    if (!(this.#rate > 0)) {
      const detail = { where: "RehearsalSource, rate", found: `${rate}`, expected: 'above 0, or "max"' };
      throw new BendwatchError("MISUSE", detail);
    }
  }

  /** What really happens `timeS` after the first sweep. */
  truthAt(timeS: number): Truth {
    return this.#truth.truthAt(timeS);
  }

  run(sink: ByteSink): Promise<void> {
    this.#stopping = false;
    this.#running = this.#deliver(sink);
    return this.#running;
  }

  stop(): Promise<void> {
    this.#stopping = true;
    return this.#running;
  }

  async #deliver(sink: ByteSink): Promise<void> {
    const {
      rig,
      durationS = Number.POSITIVE_INFINITY,
      firstTickUs = 0,
      syncHz = 0,
      driveLagS = 0,
    } = this.#options;
    const hub = new SimulatedHub({ rig, simulated: this.#simulate(), firstTickUs, syncHz, driveLagS });
    const clock = this.#clock;
    const live = Number.isFinite(this.#rate);
    const beganMs = clock.now();
    const startMs = this.#options.startMs ?? beganMs;
    let turnEndsMs = beganMs + TURN_MS;
    let timeS = 0;
    const hostMs = () => (live ? clock.now() : startMs + timeS * 1000);

    sink.linkState("open", "The rehearsal has begun.", hostMs());
    for (let chunk = 1; timeS < durationS && !this.#stopping; chunk++) {
      timeS = Math.min(chunk * CHUNK_S, durationS);
      const dueMs = beganMs + (timeS * 1000) / this.#rate;
      const aheadMs = live ? dueMs - clock.now() : 0;
      if (aheadMs > 0 || clock.now() >= turnEndsMs) {
        await clock.wait(Math.max(0, aheadMs));
        turnEndsMs = clock.now() + TURN_MS;
      }
      const bytes = hub.advanceTo(timeS);
      if (bytes.length > 0 && !this.#stopping) sink.bytes(bytes, hostMs());
    }
    sink.linkState("ended", "The rehearsal has ended.", hostMs());
  }

  #simulate(): SimulatedRig {
    const { rig, seed = 1, swimmer, earthFieldUT = EARTH_FIELD_UT, unrest } = this.#options;
    return new SimulatedRig({
      rig,
      seed,
      faults: this.#faults,
      swimmer: { ...STEADY_SWIMMER, ...swimmer },
      earthFieldUT,
      unrest,
    });
  }
}
