import { useUiState } from "../editor/hooks.ts";
import type { Shown } from "../editor/ui.ts";
import { AboutDialog } from "./AboutDialog.tsx";
import { CommandsDialog } from "./CommandsDialog.tsx";
import { KeysDialog } from "./KeysDialog.tsx";
import { OpenDialog } from "./OpenDialog.tsx";
import { ChangedDialog, FailureDialog, FaultsDialog, ReplaceDialog, UnsavedDialog } from "./QuestionDialogs.tsx";
import { SaveAsDialog } from "./SaveAsDialog.tsx";

/** Every dialog that is open, the last one on top. */
export function DialogLayer() {
  const dialogs = useUiState((s) => s.dialogs);
  return dialogs.map((shown) => <OneDialog key={shown.key} shown={shown} />);
}

function OneDialog({ shown }: { readonly shown: Shown }) {
  switch (shown.name) {
    case "unsaved":
      return <UnsavedDialog {...shown} />;
    case "open":
      return <OpenDialog {...shown} />;
    case "saveAs":
      return <SaveAsDialog {...shown} />;
    case "replace":
      return <ReplaceDialog {...shown} />;
    case "changed":
      return <ChangedDialog {...shown} />;
    case "faults":
      return <FaultsDialog {...shown} />;
    case "failure":
      return <FailureDialog {...shown} />;
    case "commands":
      return <CommandsDialog {...shown} />;
    case "keys":
      return <KeysDialog {...shown} />;
    case "about":
      return <AboutDialog {...shown} />;
  }
}
