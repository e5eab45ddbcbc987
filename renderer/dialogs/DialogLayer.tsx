import { useUiState } from "../editor/hooks.ts";
import type { Shown } from "../editor/ui.ts";
import { AddLineDialog } from "../drawer/AddLineDialog.tsx";
import { BuildDialog } from "../drawer/BuildDialog.tsx";
import { ImportDialog } from "../drawer/ImportDialog.tsx";
import { MoveDialog } from "../drawer/MoveDialog.tsx";
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
      return <UnsavedDialog ask={shown.ask} close={shown.close} />;
    case "open":
      return <OpenDialog ask={shown.ask} close={shown.close} />;
    case "saveAs":
      return <SaveAsDialog ask={shown.ask} close={shown.close} />;
    case "replace":
      return <ReplaceDialog ask={shown.ask} close={shown.close} />;
    case "changed":
      return <ChangedDialog ask={shown.ask} close={shown.close} />;
    case "faults":
      return <FaultsDialog ask={shown.ask} close={shown.close} />;
    case "failure":
      return <FailureDialog ask={shown.ask} close={shown.close} />;
    case "drawerAdd":
      return <AddLineDialog ask={shown.ask} close={shown.close} />;
    case "drawerMove":
      return <MoveDialog ask={shown.ask} close={shown.close} />;
    case "drawerImport":
      return <ImportDialog ask={shown.ask} close={shown.close} />;
    case "drawerBuild":
      return <BuildDialog ask={shown.ask} close={shown.close} />;
    case "commands":
      return <CommandsDialog ask={shown.ask} close={shown.close} />;
    case "keys":
      return <KeysDialog ask={shown.ask} close={shown.close} />;
    case "about":
      return <AboutDialog ask={shown.ask} close={shown.close} />;
  }
}
