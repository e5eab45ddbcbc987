import { Menu } from "@base-ui/react/menu";
import { Menubar } from "@base-ui/react/menubar";
import { Fragment, memo } from "react";
import { chordsOf, isPossible, labelOf, MENUS, type Action } from "../editor/actions/action.ts";
import { ACTIONS, run } from "../editor/actions/actions.ts";
import { chordText } from "../editor/actions/chords.ts";
import { useShell } from "../editor/hooks.ts";

/** All menus, made from the action table. */
export const MenuBar = memo(function MenuBar() {
  return (
    <Menubar className="menu-bar" aria-label="Menus">
      {MENUS.map((name) => (
        <Menu.Root key={name}>
          <Menu.Trigger className="menu-trigger">{name}</Menu.Trigger>
          <Menu.Portal>
            <Menu.Positioner className="positioner" sideOffset={4} align="start">
              <Menu.Popup className="popup" finalFocus={focusAfterMenu}>
                <MenuItems actions={ACTIONS.filter((action) => action.menu === name)} />
              </Menu.Popup>
            </Menu.Positioner>
          </Menu.Portal>
        </Menu.Root>
      ))}
    </Menubar>
  );
});

/** Where the focus goes when a menu closes: what its entry has brought up keeps it. */
function focusAfterMenu(by: string): boolean | HTMLElement | null {
  const focused = document.activeElement;
  if (focused !== null && focused !== document.body && focused.closest("[role=menu], [role=menubar]") === null) return false;
  return by === "mouse" ? document.querySelector<HTMLElement>(".view:not([hidden]) > main") : true;
}

/** Entries for actions, with a rule between groups. */
export function MenuItems({ actions }: { readonly actions: readonly Action[] }) {
  const { context } = useShell();
  return actions.map((action, index) => {
    const chord = chordsOf(action, context)[0];
    const isNewGroup = index > 0 && actions[index - 1].group !== action.group;
    return (
      <Fragment key={action.id}>
        {isNewGroup && <Menu.Separator className="menu-rule" />}
        {/* After the library's own handler, which takes the focus back to the entry. */}
        <Menu.Item className="menu-item" disabled={!isPossible(action, context)} onClick={() => queueMicrotask(() => run(action, context))}>
          <span>{labelOf(action, context)}</span>
          {chord !== undefined && (
            <span className="menu-chord" aria-hidden="true">
              {chordText(chord, context.isMac)}
            </span>
          )}
        </Menu.Item>
      </Fragment>
    );
  });
}
