import { useRef, useState } from "react";
import { useShell } from "../editor/hooks.ts";
import { DialogFrame } from "./DialogFrame.tsx";
import { FolderList, folderOf, folderRows } from "./FolderList.tsx";
import { isWithin } from "./OpenDialog.tsx";
import type { DialogProps } from "./QuestionDialogs.tsx";
import { useFolder } from "./use-folder.ts";
import { useListPlace, walkList } from "./use-list-keys.ts";

const FORBIDDEN = /[<>:"/\\|?*]/;

function hasControlCharacter(text: string): boolean {
  return Array.from(text).some((c) => c < " ");
}

/** What is wrong with a file name on some system, or null. */
function nameProblem(name: string): string | null {
  const text = name.trim();
  if (text === "") return "Give the file a name.";
  if (FORBIDDEN.test(text) || hasControlCharacter(text)) return 'A file name has none of < > : " / \\ | ? * in it.';
  if (text.startsWith(".")) return "A name that begins with a dot is hidden from lists.";
  if (text.length > 120) return "This name is too long for some systems.";
  return null;
}

/** Chooses a folder and a name. Whether an old file of that name may go is asked when it comes to it. */
export function SaveAsDialog({ ask, close }: DialogProps<"saveAs">) {
  const { context, host } = useShell();
  const [folder, setFolder] = useState<string | null>(() => startFolder(context.editor.store.getState().file));
  const [name, setName] = useState(ask.suggestedName);
  const [error, setError] = useState<string | null>(null);
  const { listing, problem } = useFolder(folder);
  const keys = useListPlace();
  const field = useRef<HTMLInputElement>(null);
  const rows = listing ? folderRows(listing) : [];
  const choose = (index: number): void => {
    const row = rows[index];
    if (!row) return;
    if (row.kind === "project") {
      setName(row.name);
      field.current?.focus();
    } else {
      setFolder(row.key);
      keys.setIndex(0);
    }
  };
  const isReadOnly = listing !== null && !listing.writable;

  const save = async (): Promise<void> => {
    // Quick hands press Enter before the folder has been read.
    const place = listing ?? (await host.call("files.list", { folder }).catch(() => null));
    if (!place?.writable) return;
    const wrong = nameProblem(name);
    if (wrong !== null) {
      setError(wrong);
      field.current?.focus();
      return;
    }
    const separator = place.folder.includes("\\") ? "\\" : "/";
    const file = /\.bandwright$/i.test(name.trim()) ? name.trim() : `${name.trim()}.bandwright`;
    close({ path: `${place.folder.replace(/[\\/]$/, "")}${separator}${file}`, replace: false });
  };

  return (
    <DialogFrame
      title="Save the project as"
      size="is-wide"
      focusRef={field}
      onDismiss={() => close(null)}
      foot={
        <>
          <span className="hint path">{isReadOnly ? "Nothing can be saved in this folder. Choose another place." : listing?.folder}</span>
          <button type="button" className="button" onClick={() => close(null)}>
            Cancel
          </button>
          <button type="button" className="button is-primary" disabled={listing === null || isReadOnly} onClick={() => void save()}>
            Save
          </button>
        </>
      }
    >
      <label className="field-block">
        <span>File name</span>
        <input
          ref={field}
          className="text-input"
          value={name}
          aria-invalid={error !== null}
          onFocus={(event) => event.currentTarget.select()}
          onChange={(event) => {
            setName(event.target.value);
            setError(null);
          }}
          onKeyDown={(event) => {
            if (event.key !== "Enter") return;
            // Else the rest of the key press goes to whatever has the focus once this dialog is gone.
            event.preventDefault();
            void save();
          }}
        />
        {error !== null && <span className="field-error">{error}</span>}
      </label>
      <div className="chooser">
        <nav className="chooser-roots" aria-label="Places">
          {(listing?.roots ?? []).map((root) => (
            <button
              key={root.path}
              type="button"
              className="root-button"
              title={root.path}
              aria-current={listing !== null && isWithin(root.path, listing.folder)}
              onClick={() => {
                setFolder(root.path);
                keys.setIndex(0);
              }}
            >
              {root.name}
            </button>
          ))}
        </nav>
        <div>
          <FolderList label="Projects and folders" empty={listing === null ? "" : "Nothing in this place yet."} rows={rows} index={keys.index} onIndex={keys.setIndex} onChoose={choose} onKeyDown={(event) => walkList(event, keys, rows.length, choose)} />
          {problem !== null && <p className="field-error">{problem}</p>}
        </div>
      </div>
    </DialogFrame>
  );
}

/** A file that was opened from a place that can be written to is saved beside itself; a demo is not. */
function startFolder(file: { readonly path: string; readonly isWritable: boolean } | null): string | null {
  return file?.isWritable ? folderOf(file.path) || null : null;
}
