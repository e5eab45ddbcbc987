import { chordsOf, labelOf, MENUS, type MenuName } from "../editor/actions/action.ts";
import { ACTIONS } from "../editor/actions/actions.ts";
import { chordText } from "../editor/actions/chords.ts";
import { useShell } from "../editor/hooks.ts";
import { DialogFrame } from "./DialogFrame.tsx";
import type { DialogProps } from "./QuestionDialogs.tsx";

/** What hands do on the sheet and in fields: gestures, which are no actions of their own. */
const GESTURES: readonly (readonly [what: string, keys: readonly string[]])[] = [
  ["Move a slider, when its knob has the focus", ["↑", "↓"]],
  ["Larger steps", ["PgUp", "PgDn"]],
  ["Full cut, centre, full boost", ["Home", "0", "End"]],
  ["Finer, while dragging a knob", ["Shift"]],
  ["Put the slider back while dragging", ["Esc"]],
  ["Read the response, when it has the focus", ["←", "→"]],
  ["Nudge the selected blocks", ["← ↑ → ↓"]],
  ["Walk through sliders and fields", ["Tab"]],
  ["Next preferred value in a field", ["↑", "↓"]],
  ["Zoom at the pointer", ["wheel"]],
  ["Pan", ["Space + drag"]],
  ["Add to the selection", ["Shift + click"]],
  ["Select several", ["drag beside them"]],
  ["Edit a value in place", ["double-click"]],
];

/** The same in the drawer. */
const DRAWER_KEYS: readonly (readonly [what: string, keys: readonly string[]])[] = [
  ["Walk through the table", ["← ↑ → ↓"]],
  ["A page on or back", ["PgUp", "PgDn"]],
  ["First and last column", ["Home", "End"]],
  ["First and last line", ["Ctrl + Home", "Ctrl + End"]],
  ["Choose a line, or not", ["Space"]],
  ["Choose a range", ["Shift + ↑", "Shift + ↓"]],
  ["Choose all that fit the filter", ["Ctrl + A"]],
  ["Edit the cell, or sort by the head", ["Enter", "F2"]],
  ["Take the cell and go down, or on", ["Enter", "Tab"]],
  ["Give an edit up; choose none", ["Esc"]],
  ["Take lines out of use", ["Del"]],
  ["Show the lines about a value of the axis", ["← →", "Enter"]],
];

/** All keys, from the same table that makes them work. */
export function KeysDialog({ close }: DialogProps<"keys">) {
  return (
    <DialogFrame
      title="Keys"
      size="is-wide"
      onDismiss={() => close(null)}
      foot={
        <>
          <p className="hint">Keys without Ctrl, Cmd or Alt work while the sheet has the focus.</p>
          <button type="button" className="button is-primary" onClick={() => close(null)}>
            Close
          </button>
        </>
      }
    >
      <div className="keys-grid">
        {MENUS.map((menu) => (
          <KeyGroup key={menu} menu={menu} />
        ))}
        <section className="keys-group">
          <h3>Hands</h3>
          <dl>
            {GESTURES.map(([what, keys]) => (
              <KeyRow key={what} what={what} keys={keys} />
            ))}
          </dl>
        </section>
        <section className="keys-group">
          <h3>In the drawer</h3>
          <dl>
            {DRAWER_KEYS.map(([what, keys]) => (
              <KeyRow key={what} what={what} keys={keys} />
            ))}
          </dl>
        </section>
      </div>
    </DialogFrame>
  );
}

function KeyGroup({ menu }: { readonly menu: MenuName }) {
  const { context } = useShell();
  const actions = ACTIONS.filter((action) => action.menu === menu && chordsOf(action, context).length > 0);
  return (
    <section className="keys-group">
      <h3>{menu}</h3>
      <dl>
        {actions.map((action) => (
          <KeyRow key={action.id} what={labelOf(action, context)} keys={chordsOf(action, context).map((chord) => chordText(chord, context.isMac))} />
        ))}
      </dl>
    </section>
  );
}

function KeyRow({ what, keys }: { readonly what: string; readonly keys: readonly string[] }) {
  return (
    <div className="keys-row">
      <dt>{what}</dt>
      <dd>
        {keys.map((key) => (
          <kbd key={key}>{key}</kbd>
        ))}
      </dd>
    </div>
  );
}
