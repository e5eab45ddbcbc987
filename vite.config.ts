import react from "@vitejs/plugin-react";
import { defineConfig, type Plugin } from "vite";

/** Packages name their fonts in older formats too; every engine that runs these screens reads the first. */
const oneFontFormat: Plugin = {
  name: "one-font-format",
  enforce: "pre",
  transform(code, id) {
    return id.endsWith(".css") ? code.replaceAll(/,\s*url\([^)]*\.(?:woff|ttf)\)\s*format\(["'][^)]*\)/g, "") : null;
  },
};

/** The screens, for both shells: `npm run build` also builds the desktop window's own two files. */
export default defineConfig({
  root: "renderer",
  // Addresses relative to the page, which is at the top of app://ui/ and of http://127.0.0.1:PORT/ alike.
  base: "./",
  plugins: [oneFontFormat, react()],
  build: {
    outDir: "../dist/ui",
    emptyOutDir: true,
    // The content policy allows no inline script, style or font.
    assetsInlineLimit: 0,
    sourcemap: false,
    target: "es2024",
    modulePreload: { polyfill: false },
    chunkSizeWarningLimit: 3000,
  },
  worker: { format: "es" },
});
