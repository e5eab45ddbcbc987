import { defineConfig } from "vitest/config";
import { ClosingLineReporter } from "./test/helpers/reporter.ts";

/** Folders whose tests start the whole program or a browser. */
const WHOLE_PROGRAM = ["test/app/program/**/*.test.{ts,tsx}", "test/e2e/**/*.test.{ts,tsx}"];

export default defineConfig({
  test: {
    environment: "node",
    reporters: ["default", new ClosingLineReporter()],
    projects: [
      {
        extends: true,
        test: { name: "parts", include: ["test/**/*.test.{ts,tsx}"], exclude: WHOLE_PROGRAM },
      },
      {
        extends: true,
        test: {
          name: "program",
          include: WHOLE_PROGRAM,
          globalSetup: "test/helpers/global-setup.ts",
          testTimeout: 60_000,
          hookTimeout: 60_000,
        },
      },
    ],
  },
});
