import { mkdtemp, readdir, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { expect, test } from "vitest";
import { createHostClient } from "../../../renderer/host/client.ts";
import { createLoopbackChannel } from "../../../renderer/host/loopback-channel.ts";
import { startApp } from "../../helpers/app.ts";
import { fetchFrom, redeem } from "../../helpers/loopback-fetch.ts";

test("the running program has a drawer, tells of its changes, and leaves one whole file behind", async () => {
  const home = await mkdtemp(join(tmpdir(), "bandwright-home-"));
  const app = await startApp({ home });
  const token = await redeem(app.url);
  const host = createHostClient(createLoopbackChannel({ origin: app.origin, token, fetch: fetchFrom(app.origin) }));
  const told = Promise.withResolvers<number | null>();
  host.on("drawer.changed", ({ step }) => told.resolve(step));
  const info = await host.call("drawer.info");
  expect(info.path.startsWith(app.home)).toBe(true);
  const { step, added } = await host.call("drawer.starter", { job: "begin" });
  expect(added).toBeGreaterThanOrEqual(400);
  expect(await told.promise).toBe(step);
  expect(await app.stop()).toBe(0);
  expect(await readdir(home)).toEqual(["drawer.sqlite"]);
  await rm(home, { recursive: true });
});
