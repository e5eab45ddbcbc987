import { mkdtemp, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { expect, test } from "vitest";
import { newProject } from "../../../core/model/new-project.ts";
import { serializeProject } from "../../../core/model/serialize.ts";
import { createHostClient, type HostClient } from "../../../renderer/host/client.ts";
import { createLoopbackChannel } from "../../../renderer/host/loopback-channel.ts";
import { startApp, type RunningApp } from "../../helpers/app.ts";
import { fetchFrom, redeem } from "../../helpers/loopback-fetch.ts";

/** Talks to a running program as its page does. */
async function connect(app: RunningApp): Promise<HostClient> {
  const token = await redeem(app.url);
  return createHostClient(createLoopbackChannel({ origin: app.origin, token, fetch: fetchFrom(app.origin) }));
}

test("from the demo to a file of one's own: the first save makes the folder, the demo stays as it was", async () => {
  const app = await startApp();
  const host = await connect(app);
  const { path: demo } = await host.call("project.launch");
  if (demo === null) throw new Error("there is no demo to start with");
  const before = await readFile(demo);
  const opened = await host.call("project.open", { path: demo });
  const project = { ...opened.project, name: "My channel" };
  await expect(host.call("project.save", { path: demo, project, fingerprint: opened.fingerprint, replace: true })).rejects.toMatchObject({ code: "read-only" });
  expect(await readFile(demo)).toEqual(before);

  const { folder } = await host.call("files.list", { folder: null });
  expect(folder).toBe(join(app.home, "Bandwright"));
  const saved = await host.call("project.save", { path: join(folder, "My channel"), project, fingerprint: null, replace: false });
  expect(saved.path).toBe(join(folder, "My channel.bandwright"));
  expect(await readdir(folder)).toEqual(["My channel.bandwright"]);
  expect((await host.call("files.list", { folder })).entries.map(({ name }) => name)).toEqual(["My channel.bandwright"]);
  expect(await app.stop()).toBe(0);
  await expect(host.call("project.launch")).rejects.toMatchObject({ code: "closed" });
});

test("a file named at start is shown, and saved where it is", async () => {
  const folder = await mkdtemp(join(tmpdir(), "bandwright-named-"));
  const file = join(folder, "Ω größe.bandwright");
  await writeFile(file, serializeProject(newProject()));
  const app = await startApp({ file });
  const host = await connect(app);
  expect(await host.call("project.launch")).toEqual({ path: file });
  const { fingerprint } = await host.call("project.open", { path: file });
  await host.call("project.save", { path: file, project: { ...newProject(), name: "Saved" }, fingerprint, replace: false });
  expect(await readFile(file, "utf8")).toBe(serializeProject({ ...newProject(), name: "Saved" }));
  await app.stop();
  await rm(folder, { recursive: true });
});
