import { useEffect, useRef, useState } from "react";
import type { ResultOf } from "../../core/contract/methods.ts";
import { useShell } from "../editor/hooks.ts";
import { DialogFrame } from "./DialogFrame.tsx";
import { FolderList, folderOf, folderRows, type FileRow } from "./FolderList.tsx";
import type { DialogProps } from "./QuestionDialogs.tsx";
import { useFolder } from "./use-folder.ts";
import { useListPlace, walkList } from "./use-list-keys.ts";

type Demos = ResultOf<"project.demos">["demos"];

/** Chooses a project: from the folders that this session may use, or one of the demos. */
export function OpenDialog({ ask, close }: DialogProps<"open">) {
  const { host } = useShell();
  const [isDemos, setDemos] = useState(ask.start === "demos");
  const [folder, setFolder] = useState<string | null>(null);
  const [demos, setDemoList] = useState<Demos>([]);
  const [demoProblem, setDemoProblem] = useState<string | null>(null);
  const { listing, problem } = useFolder(folder);
  const list = useRef<HTMLDivElement>(null);
  const keys = useListPlace();

  useEffect(() => {
    host.call("project.demos").then(
      (result) => setDemoList(result.demos),
      (error: unknown) => setDemoProblem(error instanceof Error ? error.message : String(error)),
    );
  }, [host]);

  const rows: FileRow[] = isDemos ? demos.map((demo) => ({ key: demo.path, kind: "project", name: demo.name, about: demo.about })) : listing ? folderRows(listing) : [];
  const go = (to: string | null): void => {
    setDemos(false);
    setFolder(to);
    keys.setIndex(0);
    list.current?.focus();
  };
  const choose = (index: number): void => {
    const row = rows[index];
    if (!row) return;
    if (row.kind === "project") close(row.key);
    else go(row.key);
  };
  const trouble = isDemos ? demoProblem : problem;
  // The demos have their own place in the list of places.
  const roots = (listing?.roots ?? []).filter((root) => !demos.some((demo) => folderOf(demo.path) === root.path));

  return (
    <DialogFrame
      title="Open a project"
      size="is-wide"
      focusRef={list}
      onDismiss={() => close(null)}
      foot={
        <>
          <span className="hint path">{isDemos ? "Demos stay as they are; save your version under another name." : listing?.folder}</span>
          <button type="button" className="button" onClick={() => close(null)}>
            Cancel
          </button>
          <button type="button" className="button is-primary" disabled={rows.length === 0} onClick={() => choose(keys.index)}>
            Open
          </button>
        </>
      }
    >
      <div className="chooser">
        <nav className="chooser-roots" aria-label="Places">
          {roots.map((root) => (
            <button key={root.path} type="button" className="root-button" title={root.path} aria-current={!isDemos && listing !== null && isWithin(root.path, listing.folder)} onClick={() => go(root.path)}>
              {root.name}
            </button>
          ))}
          <button
            type="button"
            className="root-button"
            aria-current={isDemos}
            onClick={() => {
              setDemos(true);
              keys.setIndex(0);
              list.current?.focus();
            }}
          >
            Demos
          </button>
        </nav>
        <div>
          <FolderList
            label={isDemos ? "Demos" : "Projects and folders"}
            empty={!isDemos && listing === null ? "" : "No projects in this place yet."}
            rows={rows}
            index={keys.index}
            onIndex={keys.setIndex}
            onChoose={choose}
            onKeyDown={(event) => {
              if (event.key === "Backspace" && !isDemos && listing?.parent != null) go(listing.parent);
              else walkList(event, keys, rows.length, choose);
            }}
            focusRef={list}
          />
          {trouble !== null && <p className="field-error">{trouble}</p>}
        </div>
      </div>
    </DialogFrame>
  );
}

/** Whether a path is a root or below it, by either system's separators. */
export function isWithin(root: string, path: string): boolean {
  return path === root || path.startsWith(`${root}/`) || path.startsWith(`${root}\\`);
}
