/**
 * Who may connect. On this machine only (127.0.0.1) anybody on it may; beyond, a token is needed. Host and Origin are
 * checked in both cases: a page from elsewhere, or a name that was re-pointed at this address (DNS rebinding), is refused.
 */
import { timingSafeEqual } from "node:crypto";
import type { IncomingMessage } from "node:http";
import { BendwatchError } from "../errors.ts";

const LOOPBACK = new Set(["127.0.0.1", "localhost", "::1"]);
const MIN_TOKEN_LENGTH = 12;

export interface AccessOptions {
  /** Address to listen on. */
  readonly host: string;
  /** Needed when `host` is not this machine alone. */
  readonly token?: string | undefined;
}

export class Access {
  readonly #host: string;
  readonly #token: string | undefined;

  /** @throws BendwatchError ACCESS_UNSAFE when listening beyond this machine without a token */
  constructor({ host, token }: AccessOptions) {
    if (!LOOPBACK.has(host) && token === undefined) {
      throw new BendwatchError("ACCESS_UNSAFE", {
        where: "--host",
        found: `${host} without a token`,
        expected: "127.0.0.1, or --token with it",
      });
    }
    if (token !== undefined && token.length < MIN_TOKEN_LENGTH) {
      throw new BendwatchError("ACCESS_UNSAFE", {
        where: "--token",
        found: `${token.length} characters`,
        expected: `at least ${MIN_TOKEN_LENGTH}`,
      });
    }
    this.#host = host;
    this.#token = token;
  }

  /** Why an HTTP request is refused, or null. */
  refusal(request: IncomingMessage): string | null {
    return this.#knownHost(request.headers.host) ? null : "unknown host name in the address";
  }

  /** Why a websocket handshake is refused, or null. */
  streamRefusal(request: IncomingMessage): string | null {
    const { host, origin } = request.headers;
    if (!this.#knownHost(host)) return "unknown host name in the address";
    if (origin !== undefined && urlOf(origin)?.host !== host) return "a page from another address";
    if (this.#token === undefined) return null;
    const given = new URL(request.url ?? "/", "http://bridge").searchParams.get("token") ?? "";
    return sameText(given, this.#token) ? null : "the token is missing or wrong";
  }

  /** Names under which this bridge may be addressed; an address literal cannot be re-pointed, so any is fine. */
  #knownHost(header: string | undefined): boolean {
    const name = hostName(header);
    return (
      LOOPBACK.has(name) || name === this.#host || /^\d+\.\d+\.\d+\.\d+$/.test(name) || name.includes(":")
    );
  }
}

function hostName(header: string | undefined): string {
  const name = urlOf(`http://${header ?? ""}`)?.hostname ?? "";
  return name.replace(/^\[|\]$/g, "");
}

function urlOf(text: string): URL | null {
  return URL.canParse(text) ? new URL(text) : null;
}

/** Compares in constant time. */
function sameText(a: string, b: string): boolean {
  const first = Buffer.from(a);
  const second = Buffer.from(b);
  return first.length === second.length && timingSafeEqual(first, second);
}
