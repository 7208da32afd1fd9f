import { defineConfig } from "vitest/config";

/** The dashboard is built from dashboard/ into dist/dashboard; the tests run in Node (browser tests drive Chromium themselves). */
export default defineConfig({
  root: "dashboard",
  base: "./",
  build: { outDir: "../dist/dashboard", emptyOutDir: true, target: "es2022", chunkSizeWarningLimit: 1500 },
  test: {
    root: ".",
    include: ["test/**/*.test.ts"],
    setupFiles: ["test/support/setup.ts"],
    exclude: ["**/node_modules/**"],
    testTimeout: 60_000,
    hookTimeout: 60_000,
    maxWorkers: 2,
  },
});
