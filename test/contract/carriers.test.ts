import { afterEach, describe, expect, test } from "vitest";
import { createHost, type Handlers, type Host } from "../../app/host.ts";
import { carryOverIpc, createBridge } from "../../app/ipc-carrier.ts";
import { serveLoopback } from "../../app/serve.ts";
import { HostFailure, isHostFailure } from "../../core/contract/failures.ts";
import type { ArgsOf, ResultOf } from "../../core/contract/methods.ts";
import { newProject } from "../../core/model/new-project.ts";
import type { Channel } from "../../core/contract/envelope.ts";
import { createHostClient } from "../../renderer/host/client.ts";
import { createElectronChannel } from "../../renderer/host/electron-channel.ts";
import { createLoopbackChannel } from "../../renderer/host/loopback-channel.ts";
import { createFakeChannel } from "../helpers/fake-channel.ts";
import { fakeHandlers } from "../helpers/fake-handlers.ts";
import { createFakeIpc } from "../helpers/fake-ipc.ts";
import { fetchFrom, redeem } from "../helpers/loopback-fetch.ts";

const UI = new Map([["/index.html", { type: "text/html", body: new TextEncoder().encode("<!doctype html>") }]]);

interface Connection {
  readonly channel: Channel;
  /** Ends the connection from the host's side. */
  readonly disconnect: () => Promise<void> | void;
}

const CARRIERS: Readonly<Record<string, (host: Host) => Promise<Connection> | Connection>> = {
  "within one process": (host) => {
    const channel = createFakeChannel(host);
    return { channel, disconnect: () => channel.disconnect() };
  },
  loopback: async (host) => {
    const server = await serveLoopback(host, UI);
    const token = await redeem(server.address);
    return { channel: createLoopbackChannel({ origin: server.origin, token, fetch: fetchFrom(server.origin) }), disconnect: () => server.close() };
  },
  "the desktop window's messages": (host) => {
    const ipc = createFakeIpc();
    carryOverIpc(host, ipc.receiver, () => ipc.page);
    return { channel: createElectronChannel(createBridge(ipc.port)), disconnect: () => undefined };
  },
};

const cleanUps: (() => Promise<void> | void)[] = [];
afterEach(async () => {
  for (const cleanUp of cleanUps.splice(0)) await cleanUp();
});

function saveArgs(path: string): ArgsOf<"project.save"> {
  return { path, project: newProject(), fingerprint: null, replace: false };
}

describe.each(Object.entries(CARRIERS))("over %s", (_name, connect) => {
  async function start(own: Partial<Handlers> = {}, report: (error: unknown) => void = () => undefined) {
    const host = createHost(fakeHandlers(own), report);
    const connection = await connect(host);
    cleanUps.push(() => connection.disconnect());
    return { host, ...connection, client: createHostClient(connection.channel) };
  }

  test("a call brings its result", async () => {
    const { client } = await start();
    expect(await client.call("host.capabilities")).toEqual({ fileDialogs: "inPage", version: "1.2.3", platform: "test" });
  });

  test("a project travels there and back unchanged", async () => {
    const project = { ...newProject(), notes: "größer als 4,7 kΩ", unknownKey: { kept: [1, null] } };
    let saved: unknown;
    const { client } = await start({
      "project.save": async (args) => {
        saved = args.project;
        return { path: args.path, fingerprint: "a".repeat(64) };
      },
      "project.open": async ({ path }) => ({ path, writable: true, fingerprint: "a".repeat(64), project, warnings: [{ path: "", message: "odd", blocks: ["b"] }] }),
    });
    await client.call("project.save", { ...saveArgs("/a"), project });
    expect(saved).toEqual(project);
    const opened = await client.call("project.open", { path: "/a" });
    expect(opened.project).toEqual(project);
    expect(opened.warnings).toEqual([{ path: "", message: "odd", blocks: ["b"] }]);
  });

  test.each([
    ["an empty path", { path: "" }],
    ["a path with a NUL", { path: "/a\0b" }],
    ["a number for a path", { path: 7 }],
    ["no path", {}],
    ["a key that is not in the table", { path: "/a", also: 1 }],
    ["null", null],
    ["a function", { path: () => "/a" }],
  ])("%s is refused before it reaches the handler", async (_what, args) => {
    let isReached = false;
    const { client } = await start({
      "project.open": async () => {
        isReached = true;
        throw new Error("not to be reached");
      },
    });
    const error: unknown = await client.call("project.open", args as ArgsOf<"project.open">).catch((caught: unknown) => caught);
    expect(isHostFailure(error, "bad-call") && error.data.method).toBe("project.open");
    expect(isReached).toBe(false);
  });

  test.each(["project.burn", "toString", "__proto__", ""])("there is no method %j", async (name) => {
    const { client } = await start();
    await expect(client.call(name as "project.launch")).rejects.toMatchObject({ code: "bad-call" });
  });

  test("an answer that breaks the table is not passed on", async () => {
    const { client } = await start({ "project.launch": async () => ({ path: 5 }) as unknown as ResultOf<"project.launch"> });
    await expect(client.call("project.launch")).rejects.toMatchObject({ code: "bad-result", data: { method: "project.launch" } });
  });

  test("a failure arrives with its code, its data and a sentence", async () => {
    const faults = [{ path: "blocks[3].parts.seriesC.value", message: "must be a number above 0, got -1e-7", blocks: ["b1k"] }];
    const { client } = await start({
      "project.open": async ({ path }) => {
        throw new HostFailure("project-faults", { path, faults });
      },
    });
    const error: unknown = await client.call("project.open", { path: "/a.bandwright" }).catch((caught: unknown) => caught);
    if (!isHostFailure(error, "project-faults")) throw new Error(`another failure: ${String(error)}`);
    expect(error.data).toEqual({ path: "/a.bandwright", faults });
    expect(error.message).toContain("blocks[3].parts.seriesC.value: must be a number above 0, got -1e-7");
  });

  test("an error nobody foresaw is told and reported", async () => {
    const reported: unknown[] = [];
    const unforeseen = new Error("out of ink");
    const { client } = await start(
      {
        "project.launch": async () => {
          throw unforeseen;
        },
      },
      (error) => reported.push(error),
    );
    await expect(client.call("project.launch")).rejects.toMatchObject({ code: "internal", data: { detail: "out of ink" } });
    expect(reported).toEqual([unforeseen]);
  });

  test("saves run one at a time in their order, also after one has failed; reading does not wait", async () => {
    const log: string[] = [];
    const gates = ["/1", "/2", "/3"].map((path) => ({ path, ...Promise.withResolvers<void>() }));
    const { client } = await start({
      "project.save": async ({ path }) => {
        log.push(`begin ${path}`);
        await gates.find((gate) => gate.path === path)?.promise;
        log.push(`end ${path}`);
        if (path === "/2") throw new HostFailure("file-exists", { path });
        return { path, fingerprint: "b".repeat(64) };
      },
    });
    // Sent one after the other: a carrier may overtake itself between calls that are in the air together.
    const saves: Promise<unknown>[] = [];
    for (const { path } of gates) {
      saves.push(client.call("project.save", saveArgs(path)).catch((error: unknown) => error));
      await client.call("project.launch");
    }
    expect(log).toEqual(["begin /1"]);
    for (const gate of gates.toReversed()) gate.resolve();
    const results = await Promise.all(saves);
    expect(log).toEqual(["begin /1", "end /1", "begin /2", "end /2", "begin /3", "end /3"]);
    expect(isHostFailure(results[1], "file-exists")).toBe(true);
    expect(results[2]).toEqual({ path: "/3", fingerprint: "b".repeat(64) });
  });

  test("events reach their listeners, until these have had enough", async () => {
    const { host, client } = await start();
    const heard: string[] = [];
    const first = Promise.withResolvers<void>();
    const second = Promise.withResolvers<void>();
    const stop = client.on("project.openRequested", ({ path }) => {
      heard.push(path);
      first.resolve();
    });
    // A call answered means that the connection stands, events included.
    await client.call("project.launch");
    await expect.poll(() => (host.emit("project.openRequested", { path: "/a" }), heard.length)).toBeGreaterThan(0);
    await first.promise;
    stop();
    const count = heard.length;
    client.on("project.openRequested", () => second.resolve());
    host.emit("project.openRequested", { path: "/b" });
    await second.promise;
    expect(heard).toHaveLength(count);
    expect(heard).not.toContain("/b");
  });

  test("the host refuses calls once it has closed, after finishing the save at hand", async () => {
    const gate = Promise.withResolvers<void>();
    const begun = Promise.withResolvers<void>();
    const { host, client } = await start({
      "project.save": async ({ path }) => {
        begun.resolve();
        await gate.promise;
        return { path, fingerprint: "c".repeat(64) };
      },
    });
    const save = client.call("project.save", saveArgs("/1"));
    await begun.promise;
    let isHostClosed = false;
    const closing = host.close().then(() => {
      isHostClosed = true;
    });
    await expect(client.call("project.launch")).rejects.toMatchObject({ code: "closed" });
    expect(isHostClosed).toBe(false);
    gate.resolve();
    expect((await save).path).toBe("/1");
    await closing;
  });
});

describe.each(Object.entries(CARRIERS).filter(([name]) => name !== "the desktop window's messages"))("when the host goes, over %s", (_name, connect) => {
  test("waiting calls and later ones are rejected, and the page is told once", async () => {
    const begun = Promise.withResolvers<void>();
    const host = createHost(
      fakeHandlers({
        "project.launch": () => {
          begun.resolve();
          return new Promise(() => undefined);
        },
      }),
      () => undefined,
    );
    const { channel, disconnect } = await connect(host);
    const client = createHostClient(channel);
    let closings = 0;
    client.onClose(() => {
      closings += 1;
    });
    const waiting = client.call("project.launch").catch((error: unknown) => error);
    await begun.promise;
    await disconnect();
    expect(isHostFailure(await waiting, "closed")).toBe(true);
    await expect(client.call("project.launch")).rejects.toMatchObject({ code: "closed" });
    expect(closings).toBe(1);
    const late = Promise.withResolvers<void>();
    client.onClose(late.resolve);
    await late.promise;
  });
});
