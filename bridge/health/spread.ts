/**
 * Whose trouble a disturbance is, told by where it shows at once: one sensor's (something near it), that of several
 * neighbours (something long or large near them), or the whole rig's (pump, steel, drive). When at least half of the
 * sensors that can tell, and at least three, go off within half a second of each other, the cause is none of theirs: one
 * flag for the rig. Neighbours that do are one flag, on the worst of them; any other sensor has its own.
 */
import type { FlagKind, Severity } from "../wire/flag.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";

const TOGETHER_S = 0.5;
const LEAST_TOGETHER = 3;

/** How the disturbance is worded. */
export interface SpreadWords {
  readonly one: FlagKind;
  readonly several: FlagKind;
  readonly rig: FlagKind;
  /** How long a sensor is off before it is told, so that the others can join it, s. */
  readonly confirmS: number;
  /** The rig's flag stays so long after the last moment at which it would be raised, s. */
  readonly quietS: number;
  /** Of what is measured at a sensor. */
  detail(sensor: number): string;
  severity(sensor: number): Severity;
  readonly rigSeverity: Severity;
  /** Of the rig, with `count` sensors off. */
  rigDetail(count: number): string;
  /** Called before the rig's flag is raised. */
  beforeRig?(timeS: number): void;
}

/** Who speaks for a disturbed sensor. */
const Told = { NOBODY: 0, ITSELF: 1, GROUP: 2, RIG: 3 } as const;

export class Spread {
  readonly #setup: HealthSetup;
  readonly #words: SpreadWords;
  /** Which sensors are off, since when and how much. */
  readonly #off: Hysteresis;
  readonly #told: Uint8Array;
  /** The sensor whose flag speaks for a group. */
  readonly #leader: Int16Array;
  readonly #rig: Hysteresis;
  readonly #enough: number;
  #rigSinceS = 0;

  /** @param able how many sensors can tell */
  constructor(setup: HealthSetup, off: Hysteresis, able: number, words: SpreadWords) {
    this.#setup = setup;
    this.#words = words;
    this.#off = off;
    this.#told = new Uint8Array(setup.sensors.length);
    this.#leader = new Int16Array(setup.sensors.length).fill(-1);
    this.#rig = new Hysteresis(1, 0, 0);
    this.#enough = Math.max(LEAST_TOGETHER, Math.ceil(able / 2));
  }

  /** Sensor `i` took a step of its hysteresis. */
  turned(i: number, turn: Turn): void {
    if (turn === Turn.REPORT) this.#refresh(i);
    else if (turn === Turn.END) this.#end(i);
  }

  /** Sensor `i` is off, and nothing else explains it: tells whose trouble it is, once, when it is time. */
  confirm(i: number, timeS: number): void {
    const sinceS = this.#off.sinceS[i]!;
    if (this.#told[i] !== Told.NOBODY || timeS - sinceS < this.#words.confirmS) return;
    const joins = this.#rig.on[0] === 1 && sinceS >= this.#rigSinceS - TOGETHER_S;
    let together = 0;
    for (let j = 0; j < this.#told.length; j++) if (this.#isWith(j, sinceS)) together++;
    if (!joins && together < this.#enough) {
      this.#tellNear(i, sinceS);
      return;
    }
    if (this.#rig.on[0] === 0) this.#rigSinceS = sinceS;
    for (let j = 0; j < this.#told.length; j++) if (this.#isWith(j, sinceS)) this.#told[j] = Told.RIG;
  }

  /** After all sensors: the rig's own flag. */
  judgeRig(timeS: number): void {
    const { book } = this.#setup;
    let count = 0;
    for (let i = 0; i < this.#told.length; i++) if (this.#told[i] === Told.RIG) count++;
    const turn = this.#rig.step(0, timeS, count >= this.#enough, count < this.#enough, count);
    if (turn === Turn.REPORT) {
      this.#words.beforeRig?.(timeS);
      const detail = this.#words.rigDetail(this.#rig.worst[0]!);
      book.raise(this.#words.rig, -1, this.#words.rigSeverity, this.#rigSinceS, detail);
    } else if (turn === Turn.END) {
      book.clear(this.#words.rig, -1, timeS - this.#words.quietS);
      // Those still off speak for themselves from now on.
      for (let i = 0; i < this.#told.length; i++) if (this.#told[i] === Told.RIG) this.#told[i] = Told.NOBODY;
    }
  }

  /** A flag for sensor `i` alone, or for it and the neighbours that went off with it. */
  #tellNear(i: number, sinceS: number): void {
    let first = i;
    let last = i;
    while (first > 0 && this.#isWith(first - 1, sinceS)) first--;
    while (last + 1 < this.#told.length && this.#isWith(last + 1, sinceS)) last++;
    if (first === last) {
      this.#told[i] = Told.ITSELF;
      this.#refresh(i);
      return;
    }
    let worst = first;
    for (let j = first; j <= last; j++) if (this.#off.worst[j]! > this.#off.worst[worst]!) worst = j;
    for (let j = first; j <= last; j++) {
      this.#told[j] = Told.GROUP;
      this.#leader[j] = worst;
    }
    this.#refresh(worst);
  }

  /** Sensor `j` went off together with one that did at `sinceS`, and has no flag of its own. */
  #isWith(j: number, sinceS: number): boolean {
    const near = Math.abs(this.#off.sinceS[j]! - sinceS) <= TOGETHER_S;
    return near && this.#off.on[j] === 1 && (this.#told[j] === Told.NOBODY || this.#told[j] === Told.RIG);
  }

  #refresh(i: number): void {
    const { book, sensors } = this.#setup;
    const { one, several } = this.#words;
    if (this.#told[i] === Told.ITSELF) {
      book.raise(one, i, this.#words.severity(i), this.#off.sinceS[i]!, this.#words.detail(i));
    } else if (this.#told[i] === Told.GROUP && this.#leader[i] === i) {
      const names = sensors.filter((_, j) => this.#isLedBy(i, j)).map(({ name }) => name);
      const where = names.length === 1 ? names[0]! : `${names[0]} to ${names[names.length - 1]}`;
      const detail = `at ${where}; worst here: ${this.#words.detail(i)}`;
      book.raise(several, i, this.#words.severity(i), this.#off.sinceS[i]!, detail);
    }
  }

  #isLedBy(leader: number, j: number): boolean {
    return this.#told[j] === Told.GROUP && this.#leader[j] === leader;
  }

  #end(i: number): void {
    const { book } = this.#setup;
    const endS = this.#off.lastBadS[i]!;
    const told = this.#told[i]!;
    const leader = this.#leader[i]!;
    this.#told[i] = Told.NOBODY;
    if (told === Told.ITSELF) book.clear(this.#words.one, i, endS);
    if (told !== Told.GROUP) return;
    for (let j = 0; j < this.#told.length; j++) if (this.#isLedBy(leader, j)) return;
    book.clear(this.#words.several, leader, endS);
  }
}
