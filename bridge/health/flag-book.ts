/**
 * The book of flags: what is wrong now and what was wrong lately. Detectors and the joiner (recording trouble) write it;
 * the dashboard, flags.jsonl and reports read it. At most one flag is open for a kind and a sensor.
 */
import type { Flag, FlagKind, Severity } from "../wire/flag.ts";
import { type AdviceKey, adviceFor, type Place } from "./advice.ts";

/** Ended flags kept for the display; flags.jsonl has them all. */
export const ENDED_KEPT = 200;

const RANK: Readonly<Record<Severity, number>> = { notice: 0, caution: 1, alarm: 2 };

/** Called at once, with the book's own flag object: copy it to keep it as it is now. */
export interface FlagListener {
  onRaised?(flag: Flag): void;
  /** Detail or severity of an open flag changed. */
  onChanged?(flag: Flag): void;
  onEnded?(flag: Flag): void;
}

export class FlagBook {
  readonly #sensors: readonly Place[];
  readonly #listeners: FlagListener[] = [];
  /** kind -> open flags by sensor + 1; nothing to allocate when a detector asks. */
  readonly #openBy = new Map<FlagKind, (Flag | null)[]>();
  readonly #open: Flag[] = [];
  readonly #ended: Flag[] = [];
  #lastId = 0;

  /** @param sensors nose to tail, for the wording of advice */
  constructor(sensors: readonly Place[], listener?: FlagListener) {
    this.#sensors = sensors;
    if (listener !== undefined) this.listen(listener);
  }

  listen(listener: FlagListener): void {
    this.#listeners.push(listener);
  }

  /** Newest first. */
  get open(): readonly Flag[] {
    return this.#open;
  }

  /** The last ENDED_KEPT that ended, newest first. */
  get ended(): readonly Flag[] {
    return this.#ended;
  }

  /** The open flag of this kind on `sensor` (-1: the rig), or null. */
  find(kind: FlagKind, sensor: number): Flag | null {
    return this.#openBy.get(kind)?.[sensor + 1] ?? null;
  }

  /**
   * Opens a flag; when one of this kind is open on this sensor already, updates that one instead.
   * @param startS hub time of the onset, s
   * @param advice another sentence than the kind's own
   */
  raise(
    kind: FlagKind,
    sensor: number,
    severity: Severity,
    startS: number,
    detail: string,
    advice: AdviceKey = kind,
  ): void {
    if (this.find(kind, sensor) !== null) {
      this.update(kind, sensor, detail, severity);
      return;
    }
    const flag: Flag = {
      id: ++this.#lastId,
      kind,
      sensor,
      severity,
      startS,
      endS: null,
      detail,
      advice: adviceFor(advice, sensor, this.#sensors),
    };
    let slots = this.#openBy.get(kind);
    if (slots === undefined) {
      slots = new Array<Flag | null>(this.#sensors.length + 1).fill(null);
      this.#openBy.set(kind, slots);
    }
    slots[sensor + 1] = flag;
    this.#open.unshift(flag);
    for (const listener of this.#listeners) listener.onRaised?.(flag);
  }

  /** New detail for an open flag, and its severity if that got worse; while open a flag never gets milder. */
  update(kind: FlagKind, sensor: number, detail: string, severity: Severity = "notice"): void {
    const flag = this.find(kind, sensor);
    if (flag === null) return;
    const worse = RANK[severity] > RANK[flag.severity];
    if (!worse && detail === flag.detail) return;
    if (worse) flag.severity = severity;
    flag.detail = detail;
    for (const listener of this.#listeners) listener.onChanged?.(flag);
  }

  /** Ends the open flag of this kind on this sensor, if there is one. @param endS hub time, s; never before its start */
  clear(kind: FlagKind, sensor: number, endS: number): void {
    const flag = this.find(kind, sensor);
    if (flag === null) return;
    flag.endS = Math.max(endS, flag.startS);
    this.#openBy.get(kind)![sensor + 1] = null;
    this.#open.splice(this.#open.indexOf(flag), 1);
    this.#ended.unshift(flag);
    if (this.#ended.length > ENDED_KEPT) this.#ended.pop();
    for (const listener of this.#listeners) listener.onEnded?.(flag);
  }

  /** The run is over: whatever is open ends with it. @param endS hub time, s */
  endAll(endS: number): void {
    for (const flag of [...this.#open]) this.clear(flag.kind, flag.sensor, endS);
  }
}
