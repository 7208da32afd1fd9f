/**
 * Serves the built dashboard. All files are read into memory at the start: no name from outside ever becomes a path.
 */
import { existsSync, readdirSync, readFileSync } from "node:fs";
import type { IncomingMessage, ServerResponse } from "node:http";
import { extname, join, relative, sep } from "node:path";
import { BendwatchError } from "../errors.ts";

const MEDIA_TYPES: Record<string, string> = {
  ".html": "text/html; charset=utf-8",
  ".js": "text/javascript; charset=utf-8",
  ".css": "text/css; charset=utf-8",
  ".svg": "image/svg+xml",
  ".png": "image/png",
  ".woff2": "font/woff2",
  ".json": "application/json",
};

/** Pixi uploads images from blobs; everything else comes from this bridge alone. */
const SECURITY_HEADERS = {
  "content-security-policy":
    "default-src 'none'; script-src 'self'; style-src 'self' 'unsafe-inline'; img-src 'self' data: blob:; " +
    "font-src 'self'; connect-src 'self' ws: wss:; worker-src 'self' blob:; base-uri 'none'; form-action 'none'; " +
    "frame-ancestors 'none'",
  "x-content-type-options": "nosniff",
  "referrer-policy": "no-referrer",
  "cross-origin-opener-policy": "same-origin",
};

interface ServedFile {
  readonly body: Buffer;
  readonly type: string;
  readonly cache: string;
}

export class DashboardFiles {
  readonly #files = new Map<string, ServedFile>();

  /** @throws BendwatchError DASHBOARD_MISSING when the dashboard has not been built */
  constructor(folder: string) {
    if (!existsSync(join(folder, "index.html"))) {
      throw new BendwatchError("DASHBOARD_MISSING", {
        where: folder,
        found: "no index.html",
        expected: "the built dashboard",
      });
    }
    for (const entry of readdirSync(folder, { withFileTypes: true, recursive: true })) {
      if (!entry.isFile()) continue;
      const path = join(entry.parentPath, entry.name);
      const name = `/${relative(folder, path).split(sep).join("/")}`;
      const type = MEDIA_TYPES[extname(entry.name)];
      if (type === undefined) continue;
      // Built names carry a hash of their content, all but the page itself.
      const cache = entry.name === "index.html" ? "no-cache" : "max-age=31536000, immutable";
      this.#files.set(name, { body: readFileSync(path), type, cache });
    }
    this.#files.set("/", this.#files.get("/index.html") as ServedFile);
  }

  answer(request: IncomingMessage, response: ServerResponse): void {
    if (request.method !== "GET" && request.method !== "HEAD") {
      response.writeHead(405, { ...SECURITY_HEADERS, allow: "GET, HEAD" }).end();
      return;
    }
    const name = (request.url ?? "/").split("?", 1)[0] as string;
    const file = this.#files.get(name);
    if (file === undefined) {
      response.writeHead(404, { ...SECURITY_HEADERS, "content-type": "text/plain; charset=utf-8" });
      response.end("There is nothing at this address. The dashboard is at /\n");
      return;
    }
    response.writeHead(200, {
      ...SECURITY_HEADERS,
      "content-type": file.type,
      "content-length": file.body.length,
      "cache-control": file.cache,
    });
    response.end(request.method === "HEAD" ? undefined : file.body);
  }
}
