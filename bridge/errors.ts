/**
 * Every error Bendwatch reports by itself, in one place: a stable code, where it happened, what was found, what was
 * expected and what to do. DEVELOPERS.md lists the same codes; a test holds the two together.
 *
 * Configuration and operator mistakes throw a BendwatchError. Line noise is counted, a lost device is a state: neither
 * throws.
 */

/** code -> what the operator can do about it. */
export const ADVICE = {
  CONFIG_INVALID: "Correct the keys named above and start again.",
  CONFIG_UNREADABLE:
    "Check the path and that the file is JSON; names without a path are looked up under config/.",
  COMMAND_INVALID: "See `bendwatch help`, or `bendwatch help <command>`.",
  PORT_NOT_FOUND:
    "Run `bendwatch ports` to list what is connected, then set hub.port in the rig file or pass --port.",
  TRIAL_UNREADABLE: "Run `bendwatch verify` on the trial; what lies before the damage can still be replayed.",
  TRIAL_EXISTS: "Choose another name, or move the existing trial away: a trial is never overwritten.",
  TRIAL_UNWRITABLE: "Check that the recordings folder is writable and has room, or choose another folder.",
  TABLE_INVALID: "Correct the table, or its column map, at the place named above.",
  EXPORT_FAILED:
    "Check that the folder is writable and has room, then export again; the trial itself is untouched.",
  FILE_UNWRITABLE: "Check that the folder is there and writable, or choose another file.",
  ACCESS_UNSAFE: "Listening beyond this machine needs a token: pass --token, or leave --host out.",
  ADDRESS_IN_USE: "Another program listens there: stop it, or choose another --http-port.",
  DASHBOARD_MISSING: "Run `npm run build` once; it builds the dashboard into dist/.",
  MISUSE: "This is a programming error: please report it with the steps that led here.",
} as const;

export type ErrorCode = keyof typeof ADVICE;

export interface ErrorDetail {
  /** File, key, option or place in the data. */
  readonly where: string;
  readonly found: string;
  readonly expected: string;
}

export class BendwatchError extends Error {
  readonly code: ErrorCode;
  readonly details: readonly ErrorDetail[];
  readonly advice: string;

  constructor(code: ErrorCode, details: ErrorDetail | readonly ErrorDetail[], options?: ErrorOptions) {
    const list: readonly ErrorDetail[] = Array.isArray(details) ? details : [details as ErrorDetail];
    const lines = list.map((d) => `${d.where}: found ${d.found}; expected ${d.expected}`);
    super(`${code}\n  ${lines.join("\n  ")}\n  ${ADVICE[code]}`, options);
    this.name = "BendwatchError";
    this.code = code;
    this.details = list;
    this.advice = ADVICE[code];
  }
}
