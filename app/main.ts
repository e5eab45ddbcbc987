import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { app, BrowserWindow, dialog, ipcMain, Menu, protocol, session, type WebContents } from "electron";
import { answerAppRequest, APP_PAGE, APP_SCHEME, isAppUrl } from "./app-protocol.ts";
import { createHandlers, type NativeDialogs } from "./handlers.ts";
import { createHost } from "./host.ts";
import { carryOverIpc } from "./ipc-carrier.ts";
import { fileArgument, secondStartPath, type SecondStart } from "./open-requests.ts";
import { ownDrawerPath } from "./services/drawer-path.ts";
import { withExtension } from "./services/projects.ts";
import { loadUiFiles } from "./ui-files.ts";

const APP_FOLDER = dirname(fileURLToPath(import.meta.url));
const FILTERS = [{ name: "Bandwright project", extensions: ["bandwright"] }];
const PAPER = "#FAF6EC";

let window: BrowserWindow | null = null;
/** Files asked for before the page could hear of them; the first one is what the page starts with. */
const early: string[] = [];
let openPath = (path: string): void => {
  early.push(path);
};

// Before anything else, and before ready: both have no effect later.
app.enableSandbox();
protocol.registerSchemesAsPrivileged([{ scheme: APP_SCHEME, privileges: { standard: true, secure: true, supportFetchAPI: true, codeCache: true } }]);

const startFile = fileArgument(process.argv, app.isPackaged ? 1 : 2, process.cwd());
if (startFile !== null) early.push(startFile);

if (app.requestSingleInstanceLock({ path: startFile } satisfies SecondStart)) {
  app.on("second-instance", (_event, _argv, _folder, data) => {
    if (window?.isMinimized() === true) window.restore();
    window?.focus();
    const path = secondStartPath(data);
    if (path !== null) openPath(path);
  });
  app.on("open-file", (event, path) => {
    event.preventDefault();
    openPath(path);
  });
  app.on("web-contents-created", (_event, contents) => confine(contents));
  app.on("window-all-closed", () => app.quit());
  start().catch((error: unknown) => {
    console.error(error);
    app.exit(1);
  });
} else {
  app.quit();
}

async function start(): Promise<void> {
  await app.whenReady();
  const ui = await loadUiFiles(join(APP_FOLDER, "..", "ui"));
  protocol.handle(APP_SCHEME, (request) => answerAppRequest(ui, request));
  refusePermissions();
  Menu.setApplicationMenu(process.platform === "darwin" ? macMenu() : null);

  const assets = app.isPackaged ? process.resourcesPath : join(app.getAppPath(), "assets");
  const { handlers, guard, close } = createHandlers({
    version: app.getVersion(),
    demoFolder: join(assets, "demo"),
    launchPath: early.shift() ?? null,
    dialogs: nativeDialogs(),
    drawerPath: ownDrawerPath(),
    starterPath: join(assets, "drawer", "starter.csv"),
    // Nothing can happen before the first call, and the host is there by then.
    emit: (name, data) => host.emit(name, data),
  });
  const host = createHost(handlers, (error) => console.error(error));
  carryOverIpc(host, ipcMain, () => window?.webContents ?? null);
  finishSavesBeforeQuitting(async () => {
    await host.close();
    await close();
  });

  window = createWindow();
  await window.loadURL(APP_PAGE);
  openPath = (path) => {
    void requestOpening(path);
  };
  async function requestOpening(path: string): Promise<void> {
    // What cannot be let in is asked for all the same: opening it then says what is wrong with it.
    await guard.grant(path).catch(() => undefined);
    host.emit("project.openRequested", { path });
  }
  for (const path of early.splice(0)) openPath(path);
  // Tells the launcher that the window is up; it falls back to the browser otherwise.
  process.send?.({ ready: true });
}

function createWindow(): BrowserWindow {
  const created = new BrowserWindow({
    width: 1440,
    height: 900,
    minWidth: 800,
    minHeight: 560,
    backgroundColor: PAPER,
    title: "Bandwright",
    webPreferences: {
      preload: join(APP_FOLDER, "preload.cjs"),
      contextIsolation: true,
      sandbox: true,
      nodeIntegration: false,
      nodeIntegrationInWorker: false,
      nodeIntegrationInSubFrames: false,
      webSecurity: true,
      webviewTag: false,
    },
  });
  created.webContents.on("will-prevent-unload", (event) => {
    const choice = dialog.showMessageBoxSync(created, {
      type: "question",
      message: "This project has changes that are not saved.",
      detail: "They are lost when you discard them.",
      buttons: ["Keep editing", "Discard changes"],
      defaultId: 0,
      cancelId: 0,
      noLink: true,
    });
    // Preventing the prevention: the page goes.
    if (choice === 1) event.preventDefault();
  });
  created.on("closed", () => {
    window = null;
  });
  return created;
}

/** No page of ours leads anywhere else: not by a link, not by a redirect, not in a frame, not in a new window. */
function confine(contents: WebContents): void {
  contents.on("will-navigate", (event) => {
    if (!isAppUrl(event.url)) event.preventDefault();
  });
  contents.on("will-frame-navigate", (event) => {
    if (!event.isMainFrame || !isAppUrl(event.url)) event.preventDefault();
  });
  contents.on("will-redirect", (event) => {
    if (!isAppUrl(event.url)) event.preventDefault();
  });
  contents.on("will-attach-webview", (event) => event.preventDefault());
  contents.setWindowOpenHandler(() => ({ action: "deny" }));
}

/** Everything is granted unless refused; the screens need no camera, place, device or notification. */
function refusePermissions(): void {
  session.defaultSession.setPermissionRequestHandler((_contents, _permission, answer) => answer(false));
  session.defaultSession.setPermissionCheckHandler(() => false);
  session.defaultSession.setDevicePermissionHandler(() => false);
}

function nativeDialogs(): NativeDialogs {
  let folder = app.getPath("documents");
  return {
    async chooseOpen() {
      const opts: Electron.OpenDialogOptions = { title: "Open project", defaultPath: folder, filters: FILTERS, properties: ["openFile"] };
      const { filePaths } = window === null ? await dialog.showOpenDialog(opts) : await dialog.showOpenDialog(window, opts);
      const path = filePaths[0] ?? null;
      if (path !== null) folder = dirname(path);
      return { path };
    },
    async chooseSave({ suggestedName }) {
      // A name only: whatever else is in it, it stays inside the folder.
      const name = suggestedName.replaceAll(/[/\\:*?"<>|\p{Cc}]/gu, " ").trim() || "Project";
      const opts: Electron.SaveDialogOptions = {
        title: "Save project",
        defaultPath: join(folder, withExtension(name)),
        filters: FILTERS,
        properties: ["createDirectory", "showOverwriteConfirmation"],
      };
      const { filePath } = window === null ? await dialog.showSaveDialog(opts) : await dialog.showSaveDialog(window, opts);
      if (filePath === "") return { path: null, replace: false };
      folder = dirname(filePath);
      const path = withExtension(filePath);
      // Where the extension was added, the dialog asked about another file than the one to be written.
      return { path, replace: path === filePath };
    },
  };
}

/** macOS takes its clipboard keys from a menu. The page handles a key first, the menu what it leaves. */
function macMenu(): Menu {
  return Menu.buildFromTemplate([
    { role: "appMenu" },
    { label: "Edit", submenu: [{ role: "cut" }, { role: "copy" }, { role: "paste" }, { role: "selectAll" }] },
    { role: "windowMenu" },
  ]);
}

function finishSavesBeforeQuitting(close: () => Promise<void>): void {
  let isDone = false;
  async function quitAfterwards(): Promise<void> {
    try {
      await close();
    } catch (error) {
      console.error(error);
    }
    isDone = true;
    app.quit();
  }
  app.on("will-quit", (event) => {
    if (isDone) return;
    event.preventDefault();
    void quitAfterwards();
  });
}
