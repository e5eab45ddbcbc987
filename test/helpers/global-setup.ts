import { buildStale } from "../../app/build-stale.mjs";
import { CHECKOUT } from "./app.ts";
import { prepareBrowser } from "./browser.ts";

/** Before the tests that start the program or a browser: neither is to be prepared by several of them at once. */
export default async function setup(): Promise<void> {
  await buildStale(CHECKOUT, ["ui", "app"], (line) => console.log(line));
  await prepareBrowser();
}
