/**
 * The records of packets.cborseq: an RFC 8742 sequence of CBOR arrays [kind, host time in ms since the epoch, payload].
 *
 *     "bytes"  byte string        a chunk as it arrived
 *     "link"   text               "<state>: <detail>", a change of the link
 *     "choice" map                what the operator chose here: heading
 *     "check"  map                what the operator did here in a release check: action, and step, sensor or name
 *     "gap"    map                what could not be recorded here: records, bytes, fromMs, toMs, reason
 *     "end"    text               why the recording ended; the last record of a complete trial
 */
import { decode, encode } from "cborg";
import type { LinkState } from "../link/source.ts";
import { CHECK_STEPS, type CheckAction, MAX_OPERATOR_LENGTH } from "../wire/check.ts";
import { type Choice, HEADINGS } from "../wire/messages.ts";

/** Longer chunks are split over several records, so that a reader's window can be small. */
export const MAX_CHUNK_BYTES = 65_536;
/** No record is longer: a longer one is damage. The margin holds kind, time, heads and a sentence of text. */
export const MAX_RECORD_BYTES = MAX_CHUNK_BYTES + 4096;
/** Longest text kept in a record, characters; keeps any text record well below MAX_RECORD_BYTES. */
const MAX_TEXT = 1000;

export interface Gap {
  readonly records: number;
  /** Bytes of the link that were not recorded. */
  readonly bytes: number;
  readonly fromMs: number;
  readonly toMs: number;
  readonly reason: string;
}

export type TrialRecord =
  | { readonly kind: "bytes"; readonly hostTimeMs: number; readonly chunk: Uint8Array }
  | { readonly kind: "link"; readonly hostTimeMs: number; readonly state: LinkState; readonly detail: string }
  | { readonly kind: "choice"; readonly hostTimeMs: number; readonly choice: Choice }
  | { readonly kind: "check"; readonly hostTimeMs: number; readonly check: CheckAction }
  | { readonly kind: "gap"; readonly hostTimeMs: number; readonly gap: Gap }
  | { readonly kind: "end"; readonly hostTimeMs: number; readonly detail: string };

const LINK_STATES: readonly string[] = ["opening", "open", "closed", "ended"] satisfies LinkState[];

/** One record as bytes. @param record chunk of at most MAX_CHUNK_BYTES; it is copied */
export function encodeRecord(record: TrialRecord): Uint8Array {
  return encode([record.kind, record.hostTimeMs, payloadOf(record)]);
}

function payloadOf(record: TrialRecord): Uint8Array | string | Gap | Choice | CheckAction {
  switch (record.kind) {
    case "bytes":
      return record.chunk;
    case "link":
      return `${record.state}: ${record.detail}`.slice(0, MAX_TEXT);
    case "choice":
      return record.choice;
    case "check":
      return record.check;
    case "gap":
      return { ...record.gap, reason: record.gap.reason.slice(0, MAX_TEXT) };
    case "end":
      return record.detail.slice(0, MAX_TEXT);
  }
}

/** Reads one whole record; null when the bytes are CBOR but not a record as above, or not CBOR at all. */
export function decodeRecord(bytes: Uint8Array): TrialRecord | null {
  let value: unknown;
  try {
    value = decode(bytes);
  } catch {
    return null;
  }
  if (!Array.isArray(value) || value.length !== 3) return null;
  const [kind, hostTimeMs, payload] = value as [unknown, unknown, unknown];
  if (typeof hostTimeMs !== "number" || !Number.isFinite(hostTimeMs)) return null;
  if (kind === "bytes" && payload instanceof Uint8Array) return { kind, hostTimeMs, chunk: payload };
  if (kind === "end" && typeof payload === "string") return { kind, hostTimeMs, detail: payload };
  if (kind === "link" && typeof payload === "string") return linkRecord(hostTimeMs, payload);
  if (kind === "choice" && isChoice(payload)) return { kind, hostTimeMs, choice: payload };
  if (kind === "check" && isCheck(payload)) return { kind, hostTimeMs, check: payload };
  if (kind === "gap" && isGap(payload)) return { kind, hostTimeMs, gap: payload };
  return null;
}

function linkRecord(hostTimeMs: number, text: string): TrialRecord | null {
  const colon = text.indexOf(": ");
  const state = text.slice(0, colon);
  if (!LINK_STATES.includes(state)) return null;
  return { kind: "link", hostTimeMs, state: state as LinkState, detail: text.slice(colon + 2) };
}

function isChoice(value: unknown): value is Choice {
  const heading = (value as Partial<Choice> | null)?.heading;
  return heading !== undefined && HEADINGS.includes(heading);
}

function isCheck(value: unknown): value is CheckAction {
  const { action, step, sensor, name } = (value ?? {}) as Record<string, unknown>;
  if (action === "begin" || action === "end") return (CHECK_STEPS as readonly unknown[]).includes(step);
  if (action === "take out" || action === "put back") return typeof sensor === "string";
  return action === "operator" && typeof name === "string" && name.length <= MAX_OPERATOR_LENGTH;
}

function isGap(value: unknown): value is Gap {
  if (value === null || typeof value !== "object") return false;
  const gap = value as Record<string, unknown>;
  const numbers = ["records", "bytes", "fromMs", "toMs"].every((key) => Number.isFinite(gap[key]));
  return numbers && typeof gap.reason === "string";
}

/**
 * Where the CBOR item that starts at `at` ends (RFC 8949, section 3: each item's head gives its length).
 * @param end bytes known: nothing at or past it is looked at
 * @returns offset just past the item, -1 when it goes on past `end`, -2 when it is no item a record can hold (indefinite
 *   lengths, tags, deep nesting, or longer than a record may be)
 */
export function itemEnd(bytes: Uint8Array, at: number, end: number, depth = 0): number {
  if (at >= end) return -1;
  const major = bytes[at]! >> 5;
  const info = bytes[at]! & 31;
  if (info > 27 || depth > 2) return -2;
  const headBytes = info < 24 ? 1 : 1 + (1 << (info - 24));
  if (major === 0 || major === 1 || major === 7) return at + headBytes <= end ? at + headBytes : -1;
  if (major === 6) return -2;
  if (at + headBytes > end) return -1;
  let count = info < 24 ? info : 0;
  for (let i = 1; i < headBytes; i++) count = count * 256 + bytes[at + i]!;
  if (count > MAX_RECORD_BYTES) return -2;
  if (major < 4) return at + headBytes + count <= end ? at + headBytes + count : -1;
  let next = at + headBytes;
  for (let items = major === 4 ? count : 2 * count; items > 0 && next >= 0; items--) {
    next = itemEnd(bytes, next, end, depth + 1);
  }
  return next;
}
