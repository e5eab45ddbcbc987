import type { Handlers } from "../../app/host.ts";
import { newProject } from "../../core/model/new-project.ts";

const FINGERPRINT = "0".repeat(64);

/** Handlers that answer everything with something valid; a test replaces those it is about. */
export function fakeHandlers(own: Partial<Handlers> = {}): Handlers {
  return {
    "host.capabilities": async () => ({ fileDialogs: "inPage", version: "1.2.3", platform: "test" }),
    "project.launch": async () => ({ path: null }),
    "project.demos": async () => ({ demos: [] }),
    "project.open": async ({ path }) => ({ path, writable: true, fingerprint: FINGERPRINT, project: newProject(), warnings: [] }),
    "project.save": async ({ path }) => ({ path, fingerprint: FINGERPRINT }),
    "project.chooseOpen": async () => ({ path: null }),
    "project.chooseSave": async () => ({ path: null, replace: false }),
    "files.list": async () => ({ folder: "/", parent: null, roots: [], entries: [], writable: false }),
    ...own,
  };
}
