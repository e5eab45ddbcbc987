import { Menu } from "@base-ui/react/menu";
import { memo, useMemo, useRef } from "react";
import { BAND_KINDS } from "../../core/blocks/index.ts";
import { duplicateBands } from "../../core/model/edit-bands.ts";
import { moveBlocks, setPosition } from "../../core/model/edit.ts";
import { isPossible } from "../editor/actions/action.ts";
import { ACTIONS, actionById, run } from "../editor/actions/actions.ts";
import { add, namesOf } from "../editor/actions/edit-actions.ts";
import { ghostOf } from "../drawer/ghost.ts";
import { useEditorState, useShell, useUiState } from "../editor/hooks.ts";
import { editPartText } from "../editor/part-text.ts";
import { Sheet } from "../sheet/Sheet.tsx";
import type { SheetProps } from "../sheet/sheet-props.ts";
import { useSize } from "../sheet/use-surroundings.ts";
import { useIsUnstable, useUnstableEnds } from "../worker/hooks.ts";
import { UnstableBanner } from "./Stability.tsx";
import { WiringFaults } from "./WiringFaults.tsx";
import { MenuItems } from "./MenuBar.tsx";

type Handlers = Omit<SheetProps, "project" | "board" | "results" | "selection" | "theme" | "range" | "isPhaseShown" | "isVoid" | "unstableEnds" | "topInset">;

/** The sheet with what may lie over it: an invitation on an empty board, wiring faults, the context menu. */
export function SheetArea() {
  const { context, sheetRef } = useShell();
  const { editor, ui } = context;
  const project = useEditorState((s) => s.project);
  const analysis = useEditorState((s) => s.analysis);
  const selection = useEditorState((s) => s.selection);
  const range = useEditorState((s) => s.range);
  const isPhaseShown = useUiState((s) => s.isPhaseShown);
  const isVoid = useIsUnstable();
  const unstableEnds = useUnstableEnds();
  const notice = useRef<HTMLDivElement>(null);
  const topInset = useSize(notice)?.height ?? 0;
  const theme = useUiState((s) => s.theme);
  const source = useUiState((s) => s.ghost);
  const ghost = useMemo(() => (source ? ghostOf(project, source, selection, range) : null), [project, source, selection, range]);
  const { results } = analysis;
  const shown = useMemo(() => (results && ghost ? { ...results, ghost } : results), [results, ghost]);
  const isEmpty = !project.blocks.some((block) => BAND_KINDS.includes(block.kind));

  const handlers = useMemo((): Handlers => {
    const blocks = (ids: readonly string[]) => editor.store.getState().project.blocks.filter((b) => ids.includes(b.id));
    return {
      onSelect: (ids, mode) => editor.select(ids, mode),
      onKnobStart: (id) => editor.begin(`slide ${namesOf(blocks([id]))}`),
      onKnobMove: (id, position) => editor.preview((base) => setPosition(base, id, position)),
      onKnobEnd: () => editor.commit(),
      onKnobCancel: () => editor.cancel(),
      onMove: (moves) => editor.apply(`move ${namesOf(blocks(moves.map((m) => m.id)))}`, moveBlocks(editor.store.getState().project, moves)),
      onDuplicate: (copies) => {
        const ids = copies.map((copy) => copy.id);
        add(context, `duplicate ${namesOf(blocks(ids))}`, duplicateBands(editor.store.getState().project, ids, new Map(copies.map((copy) => [copy.id, copy.at]))));
      },
      onEditValue: (id, role, text) => editPartText(editor, id, role, text),
      onContextMenu: (at) => {
        if (at.target !== null && !editor.store.getState().selection.includes(at.target)) editor.select([at.target]);
        ui.patch({ contextMenu: { ...at, frequency: ui.store.getState().cursor } });
      },
      onCursor: (cursor) => ui.patch({ cursor }),
    };
  }, [context, editor, ui]);

  return (
    <main className="sheet-area" aria-label="Sheet" tabIndex={-1}>
      <Sheet ref={sheetRef} project={project} board={analysis.board} results={shown} selection={selection} theme={theme} range={range} isPhaseShown={isPhaseShown} isVoid={isVoid} unstableEnds={unstableEnds} topInset={topInset} {...handlers} />
      <div ref={notice} className="sheet-notice">
        <UnstableBanner />
        {analysis.faults.length > 0 && <WiringFaults faults={analysis.faults} />}
      </div>
      {isEmpty && analysis.faults.length === 0 && <Invitation />}
      <ContextMenu />
    </main>
  );
}

function Invitation() {
  const { context } = useShell();
  return (
    <section className="sheet-card is-invitation" aria-label="An empty board">
      <h2>This bus has no bands yet</h2>
      <p>Hang one on it: it comes tuned to 1 kHz, and its bump appears above it. Every value can be changed afterwards, here or in the panel.</p>
      <div className="button-row">
        <button type="button" className="button is-primary" onClick={() => run(actionById("add-gyrator-section"), context)}>
          Add the first band
        </button>
        <button type="button" className="button" onClick={() => run(actionById("open-demo"), context)}>
          Look at a demo
        </button>
      </div>
    </section>
  );
}

const BLOCK_MENU = ["edit-value", "centre-slider", "slider-boost", "slider-cut", "equations-here", "duplicate", "cut", "copy", "paste", "delete"];
const SHEET_MENU = ["equations-here", "paste", "centre-all", "arrange", "fit", "zoom-in", "zoom-out", "select-all"];

const ContextMenu = memo(function ContextMenu() {
  const { context } = useShell();
  const place = useUiState((s) => s.contextMenu);
  const isOnBlock = place?.target !== undefined && place.target !== null;
  const wanted = isOnBlock ? BLOCK_MENU : SHEET_MENU;
  const prefix = isOnBlock ? "change-to-" : "add-";
  const actions = [...wanted.map(actionById), ...ACTIONS.filter((a) => a.id.startsWith(prefix) && isPossible(a, context))];
  const anchor = useMemo(() => ({ getBoundingClientRect: () => DOMRect.fromRect({ x: place?.clientX ?? 0, y: place?.clientY ?? 0, width: 0, height: 0 }) }), [place]);
  return (
    <Menu.Root open={place !== null} onOpenChange={(isOpen) => !isOpen && context.ui.patch({ contextMenu: null })}>
      <Menu.Portal>
        <Menu.Positioner className="positioner" anchor={anchor} side="bottom" align="start">
          <Menu.Popup className="popup">
            <MenuItems actions={actions} />
          </Menu.Popup>
        </Menu.Positioner>
      </Menu.Portal>
    </Menu.Root>
  );
});
