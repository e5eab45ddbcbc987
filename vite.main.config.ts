import { defineConfig } from "vite";

/** The desktop window's main process: one module, with everything in it but Electron, Node and the database, which has a compiled part. */
export default defineConfig({
  publicDir: false,
  ssr: { noExternal: true },
  build: {
    ssr: "app/main.ts",
    outDir: "dist/app",
    emptyOutDir: true,
    sourcemap: false,
    target: "node24",
    rolldownOptions: { external: ["electron", "better-sqlite3"], output: { format: "es", entryFileNames: "[name].mjs", codeSplitting: false } },
  },
});
