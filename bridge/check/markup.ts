/** HTML from templates that escape what is put into them: whatever a name holds, it stays text. */

/** Text that is markup already. */
export class Markup {
  readonly text: string;

  constructor(text: string) {
    this.text = text;
  }
}

type Part = string | number | Markup | null | readonly Part[];

/** A tagged template: strings and numbers are escaped, markup is taken as it is, lists are joined, null is nothing. */
export function html(pieces: TemplateStringsArray, ...parts: readonly Part[]): Markup {
  return new Markup(pieces.map((piece, k) => piece + (k < parts.length ? textOf(parts[k]!) : "")).join(""));
}

const ESCAPES: Readonly<Record<string, string>> = {
  "&": "&amp;",
  "<": "&lt;",
  ">": "&gt;",
  '"': "&quot;",
  "'": "&#39;",
};

function textOf(part: Part): string {
  if (part === null) return "";
  if (part instanceof Markup) return part.text;
  if (Array.isArray(part)) return part.map(textOf).join("");
  return String(part).replace(/[&<>"']/g, (character) => ESCAPES[character]!);
}
