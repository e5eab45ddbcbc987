import { homedir } from "node:os";
import { basename, dirname, join } from "node:path";
import { HostFailure } from "../core/contract/failures.ts";
import type { ArgsOf, EventData, EventName, ResultOf } from "../core/contract/methods.ts";
import type { Handlers } from "./host.ts";
import { createDrawer } from "./services/drawer.ts";
import { createFiles } from "./services/files.ts";
import { createPathGuard, type PathGuard, type Root } from "./services/path-guard.ts";
import { createProjects } from "./services/projects.ts";

/** The system's own open and save dialogs, where a shell has them. */
export interface NativeDialogs {
  chooseOpen(): Promise<ResultOf<"project.chooseOpen">>;
  chooseSave(args: ArgsOf<"project.chooseSave">): Promise<ResultOf<"project.chooseSave">>;
}

/** What differs between the shells. */
export interface ShellOpts {
  readonly version: string;
  readonly demoFolder: string;
  /** The file the user named at start; absolute. */
  readonly launchPath: string | null;
  /** Null in a browser: the page shows a chooser of its own. */
  readonly dialogs: NativeDialogs | null;
  /** The user's own parts library; made where there is none. */
  readonly drawerPath: string;
  /** The table of the starter drawer. */
  readonly starterPath: string;
  /** Sends an event to the screens. */
  readonly emit: <E extends EventName>(name: E, data: EventData<E>) => void;
}

/** Everything that a session's host stands on. */
export interface SessionHandlers {
  readonly handlers: Handlers;
  /** The shell lets picked files through it. */
  readonly guard: PathGuard;
  /** To be called when the host has closed. */
  readonly close: () => Promise<void>;
}

/** All handlers of a session. */
export function createHandlers(opts: ShellOpts): SessionHandlers {
  const projectsFolder = join(homedir(), "Bandwright");
  const roots: Root[] = [{ name: "My projects", path: projectsFolder }, { name: "Demos", path: opts.demoFolder }];
  const launchFolder = opts.launchPath === null ? null : dirname(opts.launchPath);
  if (launchFolder !== null && !roots.some((root) => root.path === launchFolder)) {
    roots.splice(1, 0, { name: basename(launchFolder) || launchFolder, path: launchFolder });
  }

  const guard = createPathGuard(roots);
  const { demoFolder, launchPath, dialogs } = opts;
  const projects = createProjects({ guard, projectsFolder, demoFolder, launchPath });
  const files = createFiles({ guard, projectsFolder, demoFolder });
  const drawer = createDrawer({ guard, drawerPath: opts.drawerPath, starterPath: opts.starterPath, now: () => new Date(), emit: opts.emit });

  const handlers: Handlers = {
    "host.capabilities": async () => ({
      fileDialogs: dialogs === null ? "inPage" : "native",
      version: opts.version,
      platform: process.platform,
    }),
    "project.launch": projects.launch,
    "project.demos": projects.demos,
    "project.open": projects.open,
    "project.save": projects.save,
    "project.chooseOpen": async () => {
      if (dialogs === null) throw new HostFailure("not-available", { method: "project.chooseOpen" });
      const answer = await dialogs.chooseOpen();
      if (answer.path !== null) await guard.grant(answer.path);
      return answer;
    },
    "project.chooseSave": async (args) => {
      if (dialogs === null) throw new HostFailure("not-available", { method: "project.chooseSave" });
      const answer = await dialogs.chooseSave(args);
      if (answer.path !== null) await guard.grant(answer.path);
      return answer;
    },
    "files.list": files.list,
    ...drawer.handlers,
  };
  return { handlers, guard, close: drawer.close };
}
