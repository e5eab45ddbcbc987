import { useRef } from "react";
import { NEEDS_NEWER } from "../../core/model/restore.ts";
import type { Dialogs, DialogName } from "../editor/ui.ts";
import { fileName } from "../editor/files.ts";
import { DialogFrame } from "./DialogFrame.tsx";

/** What a dialog is given. */
export interface DialogProps<D extends DialogName> {
  readonly ask: Dialogs[D]["ask"];
  readonly close: (answer: Dialogs[D]["answer"]) => void;
}

/** Before the document is left: save it, give it up, or stay. */
export function UnsavedDialog({ ask, close }: DialogProps<"unsaved">) {
  const first = useRef<HTMLButtonElement>(null);
  return (
    <DialogFrame
      title={`Save “${ask.name}” first?`}
      onDismiss={() => close("cancel")}
      focusRef={first}
      foot={
        <>
          <button type="button" className="button" onClick={() => close("cancel")}>
            Cancel
          </button>
          <button type="button" className="button" onClick={() => close("discard")}>
            Discard changes
          </button>
          <button type="button" className="button is-primary" ref={first} onClick={() => close("save")}>
            Save
          </button>
        </>
      }
    >
      <p>It has changes that are not in any file yet. Discarded changes cannot be brought back.</p>
    </DialogFrame>
  );
}

/** The chosen name is taken. */
export function ReplaceDialog({ ask, close }: DialogProps<"replace">) {
  const first = useRef<HTMLButtonElement>(null);
  return (
    <DialogFrame
      title={`Replace ${fileName(ask.path)}?`}
      onDismiss={() => close(false)}
      focusRef={first}
      foot={
        <>
          <button type="button" className="button" ref={first} onClick={() => close(false)}>
            Keep the old file
          </button>
          <button type="button" className="button is-primary" onClick={() => close(true)}>
            Replace it
          </button>
        </>
      }
    >
      <p className="path">There is already a file {ask.path}. Replacing it puts this board in its place; what it held is lost.</p>
    </DialogFrame>
  );
}

/** Somebody else wrote the file meanwhile. */
export function ChangedDialog({ ask, close }: DialogProps<"changed">) {
  const first = useRef<HTMLButtonElement>(null);
  return (
    <DialogFrame
      title="The file has changed on disk"
      onDismiss={() => close("cancel")}
      focusRef={first}
      foot={
        <>
          <button type="button" className="button" onClick={() => close("cancel")}>
            Cancel
          </button>
          <button type="button" className="button" onClick={() => close("reload")}>
            Open what is on disk
          </button>
          <button type="button" className="button" onClick={() => close("replace")}>
            Replace it
          </button>
          <button type="button" className="button is-primary" ref={first} onClick={() => close("saveAs")}>
            Save under another name
          </button>
        </>
      }
    >
      <p className="path">{ask.path} was changed or taken away by something else since it was opened here. Nothing has been written yet.</p>
      <ul className="hint">
        <li>Save under another name keeps both versions.</li>
        <li>Replace it puts this board in its place.</li>
        <li>Open what is on disk gives up the changes made here.</li>
      </ul>
    </DialogFrame>
  );
}

/** A file that is no sound project: everything that is wrong with it, and what to do. */
export function FaultsDialog({ ask, close }: DialogProps<"faults">) {
  const { faults, path } = ask;
  const first = useRef<HTMLButtonElement>(null);
  return (
    <DialogFrame
      title={`${fileName(path)} was not opened`}
      size="is-wide"
      onDismiss={() => close(null)}
      focusRef={first}
      foot={
        <>
          <button type="button" className="button" onClick={() => close("open")}>
            Open another file…
          </button>
          <button type="button" className="button is-primary" ref={first} onClick={() => close(null)}>
            Close
          </button>
        </>
      }
    >
      <p className="path">
        {faults.length === 1 ? "One thing is" : `${faults.length} things are`} wrong with {path}. The file was left exactly as it is, and what was open before is still open.
      </p>
      <ul className="fault-list" aria-label="Faults">
        {faults.map((fault, index) => (
          // The list never changes while it is shown.
          // oxlint-disable-next-line react/no-array-index-key
          <li key={index} className="fault-row">
            {fault.path !== "" && <code>{fault.path}</code>}
            <span>{fault.message}</span>
          </li>
        ))}
      </ul>
      <p className="hint">{faults.some((fault) => fault.message.endsWith(NEEDS_NEWER)) ? "Nothing in it has to be mended." : "Mend these places in a text editor and open it again, or open an earlier copy."}</p>
    </DialogFrame>
  );
}

/** Something that the machine could not do. */
export function FailureDialog({ ask, close }: DialogProps<"failure">) {
  return (
    <DialogFrame
      title={ask.title}
      onDismiss={() => close(null)}
      foot={
        <button type="button" className="button is-primary" onClick={() => close(null)}>
          Close
        </button>
      }
    >
      <p className="path">{ask.message}</p>
      <p className="hint">{ask.advice}</p>
    </DialogFrame>
  );
}
