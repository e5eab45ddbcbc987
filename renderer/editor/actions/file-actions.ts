import { serializeProject } from "../../../core/model/serialize.ts";
import { suggestName } from "../files.ts";
import type { Action } from "./action.ts";

export const FILE_ACTIONS: readonly Action[] = [
  {
    id: "new", label: "New board", keywords: "create start empty project", menu: "File", group: 1, inFields: "always",
    // A tab keeps Ctrl+N for a new window.
    chords: ["Mod+N"], browserChords: ["Alt+Shift+N"],
    perform: (c) => c.files.createNew(),
  },
  {
    id: "open", label: "Open…", keywords: "load project file", menu: "File", group: 1, inFields: "always",
    chords: ["Mod+O"], perform: (c) => c.files.open("projects"),
  },
  { id: "open-demo", label: "Open a demo…", keywords: "example sample project", menu: "File", group: 1, perform: (c) => c.files.open("demos") },
  {
    id: "save", label: "Save", keywords: "write store project file", menu: "File", group: 2, inFields: "always", chords: ["Mod+S"],
    perform: async (c) => {
      await c.files.save();
    },
  },
  {
    id: "save-as", label: "Save as…", keywords: "write copy name project file", menu: "File", group: 2, inFields: "always", chords: ["Mod+Shift+S"],
    perform: async (c) => {
      await c.files.saveAs();
    },
  },
  {
    id: "download", label: "Download a copy", keywords: "export backup project file", menu: "File", group: 2,
    // The desktop window saves anywhere anyway.
    when: (c) => !c.isDesktop,
    perform: (c) => {
      const { project } = c.editor.store.getState();
      download(`${suggestName(project.name)}.bandwright`, serializeProject(project));
      c.ui.notify("A copy went to the browser's downloads. The board here is not saved by that.");
    },
  },
];

/** Hands a text to the browser's downloads; works without the machine's side. */
export function download(name: string, text: string, type = "application/json"): void {
  const url = URL.createObjectURL(new Blob([text], { type }));
  const link = document.createElement("a");
  link.href = url;
  link.download = name;
  link.click();
  // The download holds on to the data by itself once it has begun.
  setTimeout(() => URL.revokeObjectURL(url), 10_000);
}
