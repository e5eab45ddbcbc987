import { readdirSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { defineConfig, type Plugin } from "vite";

const MIGRATIONS = "app/store/migrations";

/** The drawer's schema is read from files beside the module. */
function withMigrations(): Plugin {
  return {
    name: "migrations",
    generateBundle() {
      for (const name of readdirSync(MIGRATIONS)) this.emitFile({ type: "asset", fileName: `migrations/${name}`, source: readFileSync(join(MIGRATIONS, name)) });
    },
  };
}

/** The desktop window's main process: one module, with everything in it but Electron, Node and the database, which has a compiled part. */
export default defineConfig({
  publicDir: false,
  plugins: [withMigrations()],
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
