import { mkdtemp, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { runInNewContext } from "node:vm";
import { afterEach, beforeEach, describe, expect, test, vi } from "vitest";
import { newProject } from "../../../core/model/new-project.ts";
import { serializeProject } from "../../../core/model/serialize.ts";
import { CHECKOUT } from "../../helpers/app.ts";
import { createFakeElectron, FakeContents, fakeEvent } from "../../helpers/fake-electron.ts";

// The built main process, on a stand-in for Electron: the real one needs a screen and its own binary.
const MAIN = join(CHECKOUT, "dist", "app", "main.mjs");
const PRELOAD = join(CHECKOUT, "dist", "app", "preload.cjs");
const TO_HOST = "bandwright:to-host";

let folder = "";
let mine = "";
const argv = process.argv;
const send = process.send?.bind(process);
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), "bandwright-desktop-"));
  mine = join(folder, "mine.bandwright");
  await writeFile(mine, serializeProject({ ...newProject(), name: "Mine" }));
});
afterEach(async () => {
  process.argv = argv;
  if (send === undefined) delete process.send;
  else process.send = send;
  vi.doUnmock("electron");
  vi.resetModules();
  await rm(folder, { recursive: true, force: true });
});

/** Runs the main process up to the point where Electron would be ready. */
async function boot({ args = [] as readonly string[], isFirst = true } = {}) {
  const electron = createFakeElectron({ isFirst, isPackaged: false, appPath: CHECKOUT, documents: folder });
  vi.doMock("electron", () => electron.module);
  process.argv = ["/electron", CHECKOUT, ...args];
  const messages: unknown[] = [];
  const isUp = Promise.withResolvers<void>();
  process.send = (message: unknown) => {
    // The test runner's own messages use the same way.
    if (typeof message !== "object" || message === null || !("ready" in message)) return send?.(message) ?? true;
    messages.push(message);
    isUp.resolve();
    return true;
  };
  await import(MAIN);
  return { electron, messages, isUp: isUp.promise };
}

/** Runs it until its window is up. */
async function bootUp(opts: { args?: readonly string[] } = {}) {
  const booted = await boot(opts);
  booted.electron.ready.resolve();
  await booted.isUp;
  const [window] = booted.electron.windows;
  if (window === undefined) throw new Error("no window was made");
  let nextId = 0;
  return {
    ...booted,
    window,
    /** Asks the host as the page would. */
    call: async (method: string, args: unknown = {}): Promise<unknown> => {
      const id = nextId++;
      const contents = window.webContents;
      booted.electron.ipc.get(TO_HOST)?.(...([{ sender: contents, senderFrame: contents.mainFrame }, { kind: "call", id, method, args }] as never[]));
      return vi.waitFor(() => {
        const answer = contents.sent.find((message) => (message as { id?: number }).id === id);
        if (answer === undefined) throw new Error("no answer yet");
        return answer;
      });
    },
  };
}

describe("the main process", () => {
  test("sets up the sandbox and its scheme before it waits for anything", async () => {
    const { electron } = await boot();
    expect(electron.calls).toEqual(["enableSandbox", "scheme app codeCache secure standard supportFetchAPI", "whenReady"]);
  });

  test("makes one window, closed to Node, and says when it is up", async () => {
    const { electron, window, messages } = await bootUp();
    expect(electron.windows).toHaveLength(1);
    expect(window.url).toBe("app://ui/");
    expect(window.options.webPreferences).toEqual({
      preload: PRELOAD,
      contextIsolation: true,
      sandbox: true,
      nodeIntegration: false,
      nodeIntegrationInWorker: false,
      nodeIntegrationInSubFrames: false,
      webSecurity: true,
      webviewTag: false,
    });
    expect(messages).toEqual([{ ready: true }]);
  });

  test("serves the built page with the content policy, and nothing else", async () => {
    const { electron } = await bootUp();
    const page = electron.protocolHandler()?.({ url: "app://ui/", method: "GET" });
    expect(page?.headers.get("Content-Security-Policy")).toContain("default-src 'none'");
    expect(await page?.text()).toBe(await readFile(join(CHECKOUT, "dist", "ui", "index.html"), "utf8"));
    expect(electron.protocolHandler()?.({ url: "app://ui/../app/main.mjs", method: "GET" })?.status).toBe(404);
  });

  test("grants no permission", async () => {
    const { electron } = await bootUp();
    const granted: boolean[] = [];
    electron.session.setPermissionRequestHandler.mock.calls[0]?.[0]({}, "media", (isGranted) => granted.push(isGranted));
    expect(granted).toEqual([false]);
    expect(electron.session.setPermissionCheckHandler.mock.calls[0]?.[0]()).toBe(false);
    expect(electron.session.setDevicePermissionHandler.mock.calls[0]?.[0]()).toBe(false);
  });

  test("lets no contents lead elsewhere", async () => {
    const { electron } = await bootUp();
    const contents = new FakeContents();
    electron.module.app.emit("web-contents-created", {}, contents);
    const isPrevented = (name: string, details: { url: string; isMainFrame?: boolean }): boolean => {
      const event = fakeEvent(details);
      contents.emit(name, event);
      return event.isPrevented();
    };
    for (const url of ["https://example.org/", "file:///etc/passwd", "app://other/", "javascript:1", "data:text/html,x"]) {
      for (const name of ["will-navigate", "will-redirect"]) expect(isPrevented(name, { url }), `${name} ${url}`).toBe(true);
      expect(isPrevented("will-frame-navigate", { url, isMainFrame: true })).toBe(true);
    }
    for (const name of ["will-navigate", "will-redirect"]) expect(isPrevented(name, { url: "app://ui/" }), name).toBe(false);
    expect(isPrevented("will-frame-navigate", { url: "app://ui/", isMainFrame: true })).toBe(false);
    expect(isPrevented("will-frame-navigate", { url: "app://ui/", isMainFrame: false })).toBe(true);
    expect(isPrevented("will-attach-webview", { url: "app://ui/" })).toBe(true);
    expect(contents.windowOpenHandler?.()).toEqual({ action: "deny" });
  });

  test("asks before changes are lost", async () => {
    const { electron, window } = await bootUp();
    const leave = (choice: number): boolean => {
      electron.answers.messageBox = choice;
      const event = fakeEvent({});
      window.webContents.emit("will-prevent-unload", event);
      return event.isPrevented();
    };
    expect(leave(0)).toBe(false);
    expect(leave(1)).toBe(true);
  });

  test("finishes before it quits", async () => {
    const { electron } = await bootUp();
    const first = fakeEvent({});
    electron.module.app.emit("will-quit", first);
    expect(first.isPrevented()).toBe(true);
    await vi.waitFor(() => expect(electron.calls.at(-1)).toBe("quit"));
    const second = fakeEvent({});
    electron.module.app.emit("will-quit", second);
    expect(second.isPrevented()).toBe(false);
  });
});

describe("files in the desktop window", () => {
  test("the one named at start is opened, with native dialogs to choose the next", async () => {
    const { call } = await bootUp({ args: [mine] });
    expect(await call("project.launch")).toMatchObject({ result: { path: mine } });
    expect(await call("project.open", { path: mine })).toMatchObject({ result: { project: { name: "Mine" } } });
    expect(await call("host.capabilities")).toMatchObject({ result: { fileDialogs: "native", version: "1.2.3" } });
  });

  test("the one that the system asks for before the window is up is opened first", async () => {
    const { electron, isUp } = await boot();
    const event = fakeEvent({});
    electron.module.app.emit("open-file", event, mine);
    expect(event.isPrevented()).toBe(true);
    electron.ready.resolve();
    await isUp;
    const contents = electron.windows[0]?.webContents;
    electron.ipc.get(TO_HOST)?.(...([{ sender: contents, senderFrame: contents?.mainFrame }, { kind: "call", id: 1, method: "project.launch", args: {} }] as never[]));
    await vi.waitFor(() => expect(contents?.sent).toContainEqual({ kind: "ok", id: 1, result: { path: mine } }));
  });

  test.each(["open-file", "second-instance"])("the one that comes later by %s is let in and told of", async (name) => {
    const { electron, window, call } = await bootUp();
    expect(await call("project.open", { path: mine })).toMatchObject({ kind: "fail", failure: { code: "not-allowed" } });
    electron.module.app.emit(name, fakeEvent({}), ...(name === "open-file" ? [mine] : [[], "/", { path: mine }]));
    await vi.waitFor(() => expect(window.webContents.sent).toContainEqual({ kind: "event", name: "project.openRequested", data: { path: mine } }));
    expect(await call("project.open", { path: mine })).toMatchObject({ kind: "ok" });
  });

  test("a second start hands its file over, comes to the front, and makes no window of its own", async () => {
    const second = await boot({ args: [mine], isFirst: false });
    expect(second.electron.lockData()).toEqual({ path: mine });
    expect(second.electron.calls.slice(2)).toEqual(["quit"]);
    expect(second.electron.windows).toEqual([]);
    vi.doUnmock("electron");
    vi.resetModules();
    const first = await bootUp();
    first.electron.module.app.emit("second-instance", {}, [], "/", { path: null });
    expect(first.window.restore).toHaveBeenCalledOnce();
    expect(first.window.focus).toHaveBeenCalledOnce();
  });

  test("the dialogs' choices are let in; an added extension was not asked about", async () => {
    const { electron, call } = await bootUp();
    electron.answers.openDialog = [mine];
    expect(await call("project.chooseOpen")).toMatchObject({ result: { path: mine } });
    expect(await call("project.open", { path: mine })).toMatchObject({ kind: "ok" });
    electron.answers.openDialog = [];
    expect(await call("project.chooseOpen")).toMatchObject({ result: { path: null } });
    electron.answers.saveDialog = join(folder, "new.bandwright");
    expect(await call("project.chooseSave", { suggestedName: "a/b" })).toMatchObject({ result: { path: join(folder, "new.bandwright"), replace: true } });
    electron.answers.saveDialog = join(folder, "new");
    expect(await call("project.chooseSave", { suggestedName: "" })).toMatchObject({ result: { path: join(folder, "new.bandwright"), replace: false } });
    electron.answers.saveDialog = "";
    expect(await call("project.chooseSave", { suggestedName: "a" })).toMatchObject({ result: { path: null, replace: false } });
    expect(await call("project.save", { path: join(folder, "new.bandwright"), project: newProject(), fingerprint: null, replace: false })).toMatchObject({ kind: "ok" });
  });
});

test("the preload needs Electron alone, and shows the page two functions", async () => {
  const text = await readFile(PRELOAD, "utf8");
  const exposed: Record<string, object> = {};
  const required: string[] = [];
  const electron = { contextBridge: { exposeInMainWorld: (name: string, api: object) => (exposed[name] = api) }, ipcRenderer: { on: vi.fn(), send: vi.fn() } };
  runInNewContext(text, {
    require(name: string) {
      required.push(name);
      return electron;
    },
  });
  expect(required).toEqual(["electron"]);
  expect(Object.keys(exposed)).toEqual(["bandwrightHost"]);
  expect(Object.keys(exposed.bandwrightHost ?? {}).sort()).toEqual(["onMessage", "post"]);
  (exposed.bandwrightHost as { post: (message: unknown) => void }).post({ a: 1 });
  expect(electron.ipcRenderer.send).toHaveBeenCalledWith(TO_HOST, { a: 1 });
});
