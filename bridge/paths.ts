/** Where the package lies: config/, recordings/ and dist/ are found from here, whether run from source or built. */
import { existsSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

function findRoot(from: string): string {
  let folder = from;
  while (!existsSync(join(folder, "package.json"))) {
    const parent = dirname(folder);
    if (parent === folder) return from;
    folder = parent;
  }
  return folder;
}

export const packageRoot = findRoot(dirname(fileURLToPath(import.meta.url)));
