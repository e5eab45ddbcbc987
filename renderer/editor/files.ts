import { HostFailure, isHostFailure } from "../../core/contract/failures.ts";
import { newProject } from "../../core/model/new-project.ts";
import type { Project } from "../../core/model/project.ts";
import type { HostClient } from "../host/client.ts";
import type { Editor } from "./store.ts";
import type { Ui } from "./ui.ts";

/** New, Open and Save: everything between the document and the machine, with the questions that belong to it. */
export interface Files {
  /** Opens what this session was started with; an empty board where there is nothing. */
  launch(): Promise<void>;
  createNew(): Promise<void>;
  open(start: "projects" | "demos"): Promise<void>;
  openPath(path: string): Promise<void>;
  save(): Promise<boolean>;
  saveAs(): Promise<boolean>;
}

/** Builds the file commands; `isNative` where the shell has file dialogs of its own. */
export function createFiles(host: HostClient, editor: Editor, ui: Ui, isNative: boolean): Files {
  /** Whether the document may be left: saved, or given up on purpose. */
  async function mayLeave(): Promise<boolean> {
    editor.commit();
    const { isDirty, project } = editor.store.getState();
    if (!isDirty) return true;
    const answer = await ui.ask("unsaved", { name: project.name });
    if (answer === "save") return files.save();
    return answer === "discard";
  }

  async function isDemo(path: string): Promise<boolean> {
    try {
      return (await host.call("project.demos")).demos.some((demo) => demo.path === path);
    } catch {
      // It only decides a word in the top line.
      return false;
    }
  }

  /** Brings another document up. Work on the board that was open is not what anybody asked for on this one. */
  function show(...document: Parameters<Editor["load"]>): void {
    ui.patch({ task: null, taskBeside: null });
    editor.load(...document);
  }

  async function read(path: string): Promise<void> {
    ui.patch({ isBusy: true });
    try {
      const opened = await host.call("project.open", { path });
      show(opened.project, { path: opened.path, isWritable: opened.writable, isDemo: !opened.writable && (await isDemo(opened.path)), fingerprint: opened.fingerprint }, opened.warnings);
      ui.notify(`Opened ${fileName(opened.path)}.`);
    } catch (error) {
      if (isHostFailure(error, "project-faults")) {
        void ui.ask("faults", error.data).then((answer) => (answer === "open" ? files.open("projects") : undefined));
      } else void tell("The project was not opened", error);
    } finally {
      ui.patch({ isBusy: false });
    }
  }

  /** Writes the document; every refusal that the user can answer is asked about. */
  async function write(project: Project, target: { readonly path: string; readonly fingerprint: string | null; readonly replace: boolean }): Promise<boolean> {
    ui.patch({ isBusy: true });
    try {
      const { path, fingerprint } = await host.call("project.save", { ...target, project });
      editor.markSaved(project, { path, fingerprint, isWritable: true, isDemo: false });
      ui.notify(`Saved to ${path}.`);
      return true;
    } catch (error) {
      ui.patch({ isBusy: false });
      if (isHostFailure(error, "file-exists")) {
        return (await ui.ask("replace", error.data)) ? write(project, { ...target, replace: true }) : false;
      }
      if (isHostFailure(error, "read-only")) {
        ui.notify(error.message, true);
        return files.saveAs();
      }
      if (isHostFailure(error, "changed-on-disk")) {
        const answer = await ui.ask("changed", error.data);
        if (answer === "replace") return write(project, { ...target, replace: true });
        if (answer === "saveAs") return files.saveAs();
        if (answer === "reload") await read(error.data.path);
        return false;
      }
      await tell("The project was not saved", error);
      return false;
    } finally {
      ui.patch({ isBusy: false });
    }
  }

  async function tell(title: string, error: unknown): Promise<void> {
    const message = error instanceof Error ? error.message : String(error);
    await ui.ask("failure", { title, message, advice: adviceFor(error) });
  }

  const files: Files = {
    async launch() {
      const { path } = await host.call("project.launch");
      if (path !== null) await read(path);
    },
    async createNew() {
      if (!(await mayLeave())) return;
      show(newProject(), null, []);
      ui.notify("A new board.");
    },
    async open(start) {
      if (!(await mayLeave())) return;
      try {
        const path = isNative && start === "projects" ? (await host.call("project.chooseOpen")).path : await ui.ask("open", { start });
        if (path !== null) await read(path);
      } catch (error) {
        await tell("The project was not opened", error);
      }
    },
    async openPath(path) {
      if (await mayLeave()) await read(path);
    },
    async save() {
      editor.commit();
      const { project, file } = editor.store.getState();
      if (file === null || !file.isWritable) return files.saveAs();
      return write(project, { path: file.path, fingerprint: file.fingerprint, replace: false });
    },
    async saveAs() {
      editor.commit();
      const { project } = editor.store.getState();
      try {
        const suggestedName = suggestName(project.name);
        const chosen = isNative ? await host.call("project.chooseSave", { suggestedName }) : await ui.ask("saveAs", { suggestedName });
        if (chosen === null || chosen.path === null) return false;
        return await write(project, { path: chosen.path, fingerprint: null, replace: chosen.replace });
      } catch (error) {
        await tell("The project was not saved", error);
        return false;
      }
    },
  };
  return files;
}

/** The last part of a path of either kind. */
export function fileName(path: string): string {
  return path.slice(Math.max(path.lastIndexOf("/"), path.lastIndexOf("\\")) + 1);
}

/** A file name made of a project's name, without what some file system would refuse. */
export function suggestName(name: string): string {
  const plain = Array.from(name, (c) => ('<>:"/\\|?*'.includes(c) || c < " " ? " " : c)).join("").replace(/\s+/g, " ").replace(/^[. ]+|[. ]+$/g, "");
  return plain.slice(0, 80) || "Untitled board";
}

/** What the user can do about a failure. */
function adviceFor(error: unknown): string {
  if (!(error instanceof HostFailure)) return "Nothing was changed. If it happens again, save your work under another name.";
  const failure: HostFailure = error;
  switch (failure.code) {
    case "closed":
      return "This window still holds your work. Use Download a copy in the File menu to keep it, then start Bandwright again.";
    case "file-not-found":
      return "It may have been moved or renamed. Look for it with Open.";
    case "file-unreadable":
    case "not-allowed":
      return "Choose another file, or move this one into your projects folder.";
    case "file-unwritable":
      return "Your work is still here. Save it under another name or in another folder.";
    default:
      return "Your work is still here. Save it under another name.";
  }
}

