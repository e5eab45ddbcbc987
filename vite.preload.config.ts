import { defineConfig } from "vite";

/** The page's preload: a sandboxed one has to be a single CommonJS file. Built after the main process, into its folder. */
export default defineConfig({
  publicDir: false,
  ssr: { noExternal: true },
  build: {
    ssr: "app/preload.ts",
    outDir: "dist/app",
    emptyOutDir: false,
    sourcemap: false,
    target: "node24",
    rolldownOptions: { external: ["electron"], output: { format: "cjs", entryFileNames: "[name].cjs", codeSplitting: false } },
  },
});
