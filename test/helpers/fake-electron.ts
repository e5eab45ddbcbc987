import { EventEmitter } from "node:events";
import { vi } from "vitest";

type Listener = (...args: never[]) => void;

/** Electron's side of an event that can be prevented. */
export interface FakeEvent {
  readonly preventDefault: () => void;
  readonly isPrevented: () => boolean;
}

/** An event with whatever the real one carries besides. */
export function fakeEvent<T extends object>(more: T): FakeEvent & T {
  let prevented = false;
  return {
    ...more,
    preventDefault: () => {
      prevented = true;
    },
    isPrevented: () => prevented,
  };
}

/** A window's contents: notes what is sent to the page. */
export class FakeContents extends EventEmitter {
  readonly mainFrame = { origin: "app://ui" };
  readonly sent: unknown[] = [];
  windowOpenHandler: (() => { action: string }) | undefined;
  send(_channel: string, message: unknown): void {
    this.sent.push(structuredClone(message));
    this.emit("sent");
  }
  isDestroyed(): boolean {
    return false;
  }
  setWindowOpenHandler(handler: () => { action: string }): void {
    this.windowOpenHandler = handler;
  }
}

interface WindowOptions {
  readonly webPreferences: Readonly<Record<string, unknown>>;
}

/** A window that shows nothing. */
export class FakeWindow extends EventEmitter {
  readonly webContents = new FakeContents();
  readonly options: WindowOptions;
  url = "";
  readonly focus = vi.fn<() => void>();
  readonly restore = vi.fn<() => void>();
  constructor(options: WindowOptions) {
    super();
    this.options = options;
  }
  isMinimized(): boolean {
    return true;
  }
  async loadURL(url: string): Promise<void> {
    this.url = url;
  }
}

/**
 * As much of Electron as the main process uses, with every call noted in order. It stands in for what cannot run
 * without a screen: it proves what our code asks of Electron, not what Electron then does.
 */
export function createFakeElectron(opts: { readonly isFirst: boolean; readonly isPackaged: boolean; readonly appPath: string; readonly documents: string }) {
  const calls: string[] = [];
  const ready = Promise.withResolvers<void>();
  const ipc = new Map<string, Listener>();
  const windows: FakeWindow[] = [];
  const answers = { openDialog: [] as string[], saveDialog: "", messageBox: 0 };
  let protocolHandler: ((request: { url: string; method: string }) => Response) | undefined;
  let lockData: unknown;

  const app = Object.assign(new EventEmitter(), {
    isPackaged: opts.isPackaged,
    enableSandbox: () => calls.push("enableSandbox"),
    requestSingleInstanceLock: (data: unknown) => {
      lockData = data;
      return opts.isFirst;
    },
    whenReady: () => {
      calls.push("whenReady");
      return ready.promise;
    },
    getVersion: () => "1.2.3",
    getAppPath: () => opts.appPath,
    getPath: () => opts.documents,
    quit: () => calls.push("quit"),
    exit: (code: number) => calls.push(`exit ${code}`),
  });

  const session = {
    setPermissionRequestHandler: vi.fn<(handler: (contents: unknown, permission: string, answer: (isGranted: boolean) => void) => void) => void>(),
    setPermissionCheckHandler: vi.fn<(handler: () => boolean) => void>(),
    setDevicePermissionHandler: vi.fn<(handler: () => boolean) => void>(),
  };

  return {
    calls,
    ready,
    ipc,
    windows,
    answers,
    session,
    protocolHandler: () => protocolHandler,
    lockData: () => lockData,
    module: {
      app,
      // Called with `new`, which gives what the function gives.
      BrowserWindow: function makeWindow(options: WindowOptions): FakeWindow {
        const window = new FakeWindow(options);
        windows.push(window);
        app.emit("web-contents-created", {}, window.webContents);
        return window;
      },
      dialog: {
        showOpenDialog: async () => ({ filePaths: answers.openDialog }),
        showSaveDialog: async () => ({ filePath: answers.saveDialog }),
        showMessageBoxSync: () => answers.messageBox,
      },
      ipcMain: { on: (channel: string, listener: Listener) => ipc.set(channel, listener) },
      Menu: { setApplicationMenu: () => calls.push("setApplicationMenu"), buildFromTemplate: () => ({}) },
      protocol: {
        registerSchemesAsPrivileged: (schemes: readonly { scheme: string; privileges: Record<string, boolean> }[]) =>
          calls.push(`scheme ${schemes.map(({ scheme, privileges }) => `${scheme} ${Object.keys(privileges).sort().join(" ")}`).join("; ")}`),
        handle: (_scheme: string, handler: (request: { url: string; method: string }) => Response) => {
          calls.push("protocol.handle");
          protocolHandler = handler;
        },
      },
      session: { defaultSession: session },
    },
  };
}
