import { useCallback, useId, useImperativeHandle, useLayoutEffect, useMemo, useRef, useState, type KeyboardEvent, type Ref } from "react";
import { BLOCKS } from "../../core/blocks/index.ts";
import { arrangedPlaces, layoutSheet, movedPlace } from "../../core/geometry/layout.ts";
import { placeOf } from "../../core/geometry/hit.ts";
import { isSameSheet } from "../../core/geometry/rails.ts";
import { readCurve } from "../../core/geometry/reading.ts";
import type { Box } from "../../core/geometry/units.ts";
import { bandValues, chainValues, type ValueTarget } from "../../core/geometry/values.ts";
import { partsOf, type Project, type SheetPoint } from "../../core/model/project.ts";
import { createOverlay } from "./overlay-store.ts";
import { ScrollBar } from "./ScrollBar.tsx";
import { SheetProxies } from "./SheetProxies.tsx";
import type { SheetHandle, SheetProps } from "./sheet-props.ts";
import { SheetStage } from "./SheetStage.tsx";
import "./sheet.css";
import { INKS } from "./tokens.ts";
import { useGestures } from "./use-gestures.ts";
import { useFontsReady, usePixelRatio, useSize } from "./use-surroundings.ts";
import { ValueEditor } from "./ValueEditor.tsx";
import { pannedView, revealingView, useView, zoomedView } from "./view.ts";

/** The drawing sheet: the response above, the board below, on one frequency ruling. It reports gestures and decides nothing. */
export function Sheet({ ref, ...props }: SheetProps & { readonly ref?: Ref<SheetHandle> }) {
  const { project, results, selection, theme, range, isVoid = false, unstableEnds = NO_ENDS, topInset = 0 } = props;
  const element = useRef<HTMLDivElement>(null);
  const sheetId = useId();
  const size = useSize(element);
  const ratio = usePixelRatio();
  const areFontsReady = useFontsReady();
  const { view, setView, fit } = useView();
  const [overlay] = useState(createOverlay);
  const card = useRef<Box | null>(null);
  const [held, setHeld] = useState<string | null>(null);
  const [moving, setMoving] = useState<ReadonlyMap<string, SheetPoint> | null>(null);
  const [editing, setEditing] = useState<{ id: string; role: string } | null>(null);

  const drawn = useDrawnProject(project);
  const figures = results?.figures ?? null;
  const hasResponse = results !== null;
  const blocks = useMemo(() => new Map(project.blocks.map((block) => [block.id, block])), [project]);
  const { from, to } = range;
  const whole = useMemo(
    () => (size && size.width > 0 && size.height > 0 ? { project: drawn, figures, ...size, topInset, hasResponse, range: { from, to } } : null),
    [drawn, figures, size, topInset, hasResponse, from, to],
  );
  const layout = useMemo(() => (whole ? layoutSheet({ ...whole, ...view, ...(moving ? { moving } : {}) }) : null), [whole, view, moving]);

  // Handlers that stay the same from move to move, so that only the proxy that changes is rendered again.
  const latest = useRef({ props, layout, view, blocks });
  useLayoutEffect(() => {
    latest.current = { props, layout, view, blocks };
  });
  const onCursorAt = useCallback(
    (frequency: number | null) => {
      overlay.setState({ cursor: frequency });
      const now = latest.current.props;
      const isOnCurve = frequency !== null && now.results !== null && readCurve(now.results.total, frequency) !== null;
      now.onCursor(isOnCurve ? frequency : null);
    },
    [overlay],
  );
  const pan = (dx: number, dy: number): void => {
    if (layout) setView(pannedView(view, layout, dx, dy));
  };
  const zoom = (factor: number, at: { x: number; y: number }): void => {
    if (layout && whole) setView(zoomedView(whole, layout, factor, at));
  };
  const edit = (id: string, role: string): void => setEditing({ id, role });
  const gestures = useGestures({
    element, layout, blocks, props, overlay, card, moving, setMoving, setHeld, onPan: pan, onZoom: zoom,
    onEdit: (value) => edit(value.id, value.role), onCursorAt,
  });

  const actions = useMemo(
    () => ({
      onKnobStart: (id: string) => {
        setHeld(id);
        latest.current.props.onKnobStart(id);
      },
      onKnobMove: (id: string, position: number) => latest.current.props.onKnobMove(id, position),
      onKnobEnd: () => {
        setHeld(null);
        latest.current.props.onKnobEnd();
      },
      onKnobCancel: () => {
        setHeld(null);
        latest.current.props.onKnobCancel();
      },
      onPick: (id: string) => latest.current.props.onSelect([id], "replace"),
      onReveal: (id: string) => {
        const now = latest.current;
        const place = now.layout && (placeOf(now.layout, now.blocks, id, "knob") ?? placeOf(now.layout, now.blocks, id, "block"));
        if (now.layout && place) setView(revealingView(now.view, now.layout, place));
      },
    }),
    [setView],
  );

  useImperativeHandle(ref, (): SheetHandle => ({
    fit,
    zoomBy: (factor) => {
      if (layout) zoom(factor, { x: (layout.frame.ruling.left + layout.frame.ruling.right) / 2, y: layout.frame.board.top });
    },
    panBy: pan,
    arrange: () => arrangedPlaces(project, figures, range),
    focusBlock: (id) => {
      actions.onReveal(id);
      element.current?.querySelector<HTMLElement>(`[data-band="${CSS.escape(id)}"], [data-block="${CSS.escape(id)}"]`)?.focus({ preventScroll: true });
    },
    editValue: (id) => {
      const block = blocks.get(id);
      const role = block && BLOCKS[block.kind].roles.find((r) => partsOf(block)[r.role] !== undefined)?.role;
      if (role === undefined) return;
      actions.onReveal(id);
      edit(id, role);
    },
    screenPlaceOf: (id, part) => {
      const at = layout && placeOf(layout, blocks, id, part);
      const box = element.current?.getBoundingClientRect();
      return at && box ? { x: at.x + box.left, y: at.y + box.top } : null;
    },
  }));

  const nudge = (dx: number, dy: number): void => {
    if (!layout) return;
    const moves = selection.flatMap((id) => {
      const at = movedPlace(layout, id, dx, dy);
      return at ? [{ id, at }] : [];
    });
    if (moves.length > 0) props.onMove(moves);
  };
  const onKeyDown = (event: KeyboardEvent<HTMLDivElement>): void => {
    if (event.key === "Escape" && gestures.cancel()) {
      event.stopPropagation();
      event.preventDefault();
      return;
    }
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    const step = NUDGES[event.key];
    if (!step || selection.length === 0) return;
    event.preventDefault();
    const reach = event.shiftKey ? 20 : 4;
    nudge(step[0] * reach, step[1] * reach);
  };

  const editedBlock = editing && blocks.get(editing.id);
  return (
    <div
      ref={element}
      id={sheetId}
      className="sheet"
      role="group"
      aria-label={`Sheet of ${project.name}`}
      tabIndex={0}
      style={{ cursor: gestures.cursorStyle, background: INKS[theme].paper }}
      {...gestures.handlers}
      onKeyDown={onKeyDown}
    >
      {layout && areFontsReady && (
        <SheetStage
          layout={layout} drawn={drawn} blocks={blocks} results={results} selection={selection} held={held} inks={INKS[theme]} ratio={ratio}
          isPhaseShown={props.isPhaseShown ?? false} isVoid={isVoid} unstableEnds={unstableEnds} overlay={overlay} cardPlace={card}
        />
      )}
      {layout && (
        <>
          <div className="sheet-surface" aria-hidden="true" />
          <SheetProxies
            layout={layout} blocks={blocks} results={results} selection={selection} isVoid={isVoid} unstableEnds={unstableEnds} actions={actions} overlay={overlay}
            onCursorAt={onCursorAt}
          />
          <ScrollBar layout={layout} controls={sheetId} onScroll={(scroll) => setView({ ...view, scroll })} />
        </>
      )}
      {layout && editing && editedBlock && (
        <ValueEditor
          key={`${editing.id}.${editing.role}`}
          block={editedBlock}
          role={editing.role}
          {...editorPlace(layout, editing, valueTargets(layout, blocks, editing.id))}
          onTake={(text) => props.onEditValue(editing.id, editing.role, text)}
          onLeave={() => {
            setEditing(null);
            element.current?.focus({ preventScroll: true });
          }}
        />
      )}
    </div>
  );
}

const NO_ENDS: NonNullable<SheetProps["unstableEnds"]> = [];

const NUDGES: Readonly<Record<string, readonly [number, number] | undefined>> = { ArrowLeft: [-1, 0], ArrowRight: [1, 0], ArrowUp: [0, -1], ArrowDown: [0, 1] };

/** The project as it is laid out: the same object as long as only sliders move. */
function useDrawnProject(project: Project): Project {
  const [kept, setKept] = useState(project);
  if (kept === project || isSameSheet(kept, project)) return kept;
  setKept(project);
  return project;
}

type Layout = NonNullable<ReturnType<typeof layoutSheet>>;

function valueTargets(layout: Layout, blocks: ReadonlyMap<string, Parameters<typeof bandValues>[1]>, id: string): readonly ValueTarget[] {
  const band = layout.bands.find((b) => b.id === id);
  const block = blocks.get(id);
  if (band && block) return bandValues(band, block);
  const chain = layout.chain.find((c) => c.id === id);
  return chain ? chainValues(chain) : [];
}

/** Over the value where it is written, else over the middle of its block; always in sight. */
function editorPlace(layout: Layout, editing: { id: string; role: string }, targets: readonly ValueTarget[]): { left: number; top: number } {
  const value = targets.find((t) => t.role === editing.role);
  const box = value?.box ?? layout.bands.find((b) => b.id === editing.id)?.box ?? layout.chain.find((c) => c.id === editing.id)?.box;
  const at = value ? { x: value.box.left - 5, y: value.box.top - 6 } : { x: box ? (box.left + box.right) / 2 - 46 : 0, y: box ? (box.top + box.bottom) / 2 : 0 };
  return { left: Math.round(Math.max(4, Math.min(layout.frame.width - 230, at.x))), top: Math.round(Math.max(4, Math.min(layout.frame.height - 70, at.y))) };
}
