import { describe, expect, test } from "vitest";
import { createHost } from "../../app/host.ts";
import { carryOverIpc, createBridge, isTrustedSender, type IpcEvent, type IpcSender } from "../../app/ipc-carrier.ts";
import { fakeHandlers } from "../helpers/fake-handlers.ts";
import { createFakeIpc } from "../helpers/fake-ipc.ts";

const CALL = { kind: "call", id: 1, method: "host.capabilities", args: {} };

describe("messages from the desktop window", () => {
  const ipc = createFakeIpc();
  const ours: IpcEvent = { sender: ipc.page, senderFrame: ipc.page.mainFrame as { origin: string } };
  const otherPage: IpcSender = { ...ipc.page, mainFrame: { origin: "app://ui" } };

  test("our own page's are trusted", () => {
    expect(isTrustedSender(ours, ipc.page)).toBe(true);
  });

  test.each<[string, IpcEvent, IpcSender | null]>([
    ["from a frame that has gone", { ...ours, senderFrame: null }, ipc.page],
    ["from a frame inside the page", { ...ours, senderFrame: { origin: "app://ui" } }, ipc.page],
    ["from another window", { sender: otherPage, senderFrame: otherPage.mainFrame as { origin: string } }, ipc.page],
    ["with no window of ours open", ours, null],
  ])("%s: not trusted", (_what, event, page) => {
    expect(isTrustedSender(event, page)).toBe(false);
  });

  test.each(["https://example.org", "file://", "app://ui.example.org", "app://other", "null", ""])("from the origin %j: not trusted", (origin) => {
    const mainFrame = { origin };
    const page: IpcSender = { ...ipc.page, mainFrame };
    expect(isTrustedSender({ sender: page, senderFrame: mainFrame }, page)).toBe(false);
  });

  test("what is not trusted gets no answer, and does nothing", async () => {
    const pair = createFakeIpc();
    let calls = 0;
    const host = createHost(
      fakeHandlers({
        "host.capabilities": async () => {
          calls += 1;
          return { fileDialogs: "native", version: "1", platform: "test" };
        },
      }),
      () => undefined,
    );
    carryOverIpc(host, pair.receiver, () => pair.page);
    const bridge = createBridge(pair.port);
    const answered = Promise.withResolvers<unknown>();
    bridge.onMessage(answered.resolve);
    bridge.post({ ...CALL, id: 7 });
    expect(await answered.promise).toMatchObject({ kind: "ok", id: 7 });
    expect(calls).toBe(1);

    const [channel = ""] = pair.channels;
    pair.inject(channel, CALL, { senderFrame: null });
    pair.inject(channel, CALL, { senderFrame: { origin: "app://ui" } });
    await new Promise((resolve) => setTimeout(resolve, 10));
    expect(calls).toBe(1);
    expect(pair.received).toHaveLength(1);
  });

  test("the page is given two functions, and never the event", async () => {
    const pair = createFakeIpc();
    const bridge = createBridge(pair.port);
    expect(Object.keys(bridge).sort()).toEqual(["onMessage", "post"]);
    const seen = Promise.withResolvers<unknown[]>();
    bridge.onMessage((...args: unknown[]) => seen.resolve(args));
    const host = createHost(fakeHandlers(), () => undefined);
    carryOverIpc(host, pair.receiver, () => pair.page);
    host.emit("project.openRequested", { path: "/a" });
    expect(await seen.promise).toEqual([{ kind: "event", name: "project.openRequested", data: { path: "/a" } }]);
  });
});
