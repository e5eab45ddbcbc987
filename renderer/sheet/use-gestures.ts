import { useEffect, useRef, useState, type MouseEvent, type PointerEvent, type RefObject } from "react";
import { blocksIn, hitTest, type Hit } from "../../core/geometry/hit.ts";
import { movedPlace, type SheetLayout } from "../../core/geometry/layout.ts";
import { frequencyAt } from "../../core/geometry/ruling.ts";
import { px, type Box } from "../../core/geometry/units.ts";
import type { ValueTarget } from "../../core/geometry/values.ts";
import type { Block, SheetPoint } from "../../core/model/project.ts";
import type { OverlayStore } from "./overlay-store.ts";
import type { SheetProps } from "./sheet-props.ts";

/** What the hand is doing. */
type Gesture =
  | { readonly kind: "knob"; readonly id: string; isStarted: boolean; isFine: boolean; fromY: number; fromPosition: number }
  | { readonly kind: "pan"; lastX: number; lastY: number }
  | { readonly kind: "marquee"; readonly startX: number; readonly startY: number; readonly isAdding: boolean; isStarted: boolean }
  | { readonly kind: "move"; readonly id: string; readonly ids: readonly string[]; readonly startX: number; readonly startY: number; readonly layout: SheetLayout; isStarted: boolean };

export interface GestureOpts {
  readonly element: RefObject<HTMLDivElement | null>;
  readonly layout: SheetLayout | null;
  readonly blocks: ReadonlyMap<string, Block>;
  readonly props: SheetProps;
  readonly overlay: OverlayStore;
  /** Where the selected band's card was drawn. */
  readonly card: RefObject<Box | null>;
  readonly moving: ReadonlyMap<string, SheetPoint> | null;
  readonly setMoving: (moving: ReadonlyMap<string, SheetPoint> | null) => void;
  readonly setHeld: (id: string | null) => void;
  readonly onPan: (dx: number, dy: number) => void;
  readonly onZoom: (factor: number, at: { x: number; y: number }) => void;
  readonly onEdit: (value: ValueTarget) => void;
  readonly onCursorAt: (frequency: number | null) => void;
}

/** Pixels that a press may wander before it is a drag. */
const SLACK = 4;
/** How much finer a slider moves with Shift. */
const FINE = 0.1;
/** Pixels about the centre in which a knob settles there. */
const DETENT = 2.5;

/** Everything that a pointer does on the sheet. Each gesture is reported once, with its end; Esc takes it back. */
export function useGestures(opts: GestureOpts) {
  const { element, layout, blocks, props, overlay } = opts;
  const gesture = useRef<Gesture | null>(null);
  const isSpaceDown = useSpaceKey(element);
  const [cursorStyle, setCursorStyle] = useState("default");

  const point = (event: { clientX: number; clientY: number }): { x: number; y: number } => {
    const box = element.current?.getBoundingClientRect();
    return { x: event.clientX - (box?.left ?? 0), y: event.clientY - (box?.top ?? 0) };
  };
  const hitAt = ({ x, y }: { x: number; y: number }): Hit | null => (layout ? hitTest(layout, blocks, { x: px(x), y: px(y) }, onlyOf(props.selection), opts.card.current) : null);
  const finish = (): void => {
    gesture.current = null;
    overlay.setState({ marquee: null });
    opts.setHeld(null);
    opts.setMoving(null);
  };

  const onPointerDown = (event: PointerEvent<HTMLDivElement>): void => {
    if (!layout || gesture.current) return;
    const at = point(event);
    if (event.button === 1 || (event.button === 0 && isSpaceDown.current)) {
      event.preventDefault();
      element.current?.setPointerCapture(event.pointerId);
      gesture.current = { kind: "pan", lastX: event.clientX, lastY: event.clientY };
      setCursorStyle("grabbing");
      return;
    }
    if (event.button !== 0) return;
    element.current?.setPointerCapture(event.pointerId);
    const hit = hitAt(at);
    focusFor(element.current, hit, at.y < layout.frame.response.bottom);
    event.preventDefault();
    if (!hit) {
      if (at.y >= layout.frame.board.top) gesture.current = { kind: "marquee", startX: at.x, startY: at.y, isAdding: event.shiftKey, isStarted: false };
      return;
    }
    if (event.shiftKey && hit.part !== "knob") {
      props.onSelect([hit.id], "toggle");
      return;
    }
    const isSelected = props.selection.includes(hit.id);
    if (!isSelected) props.onSelect([hit.id], "replace");
    if (hit.part === "knob") {
      opts.onCursorAt(null);
      const position = blocks.get(hit.id)?.slider?.position ?? 0.5;
      gesture.current = { kind: "knob", id: hit.id, isStarted: false, isFine: event.shiftKey, fromY: at.y, fromPosition: position };
      return;
    }
    gesture.current = { kind: "move", id: hit.id, ids: isSelected ? props.selection : [hit.id], startX: at.x, startY: at.y, layout, isStarted: false };
  };

  const moveKnob = (held: Extract<Gesture, { kind: "knob" }>, y: number, isFine: boolean): void => {
    const place = layout?.bands.find((b) => b.id === held.id);
    if (!place) return;
    const length = place.trackBottom - place.trackTop;
    const at = (fine: boolean): number => held.fromPosition + ((held.fromY - y) / length) * (fine ? FINE : 1);
    if (isFine !== held.isFine) {
      // The knob goes on from where it is when Shift comes or goes.
      held.fromPosition = at(held.isFine);
      held.fromY = y;
      held.isFine = isFine;
    }
    const wanted = at(isFine);
    const isNearCentre = !isFine && Math.abs(wanted - 0.5) * length < DETENT;
    const position = isNearCentre ? 0.5 : Math.max(0, Math.min(1, Math.round(wanted * 1e4) / 1e4));
    if (!held.isStarted) {
      if (Math.abs(y - held.fromY) < 1) return;
      held.isStarted = true;
      opts.setHeld(held.id);
      props.onKnobStart(held.id);
    }
    props.onKnobMove(held.id, position);
  };

  const onPointerMove = (event: PointerEvent<HTMLDivElement>): void => {
    if (!layout) return;
    const at = point(event);
    const active = gesture.current;
    if (!active) {
      hover(at);
      return;
    }
    if (active.kind === "knob") moveKnob(active, at.y, event.shiftKey);
    else if (active.kind === "pan") {
      opts.onPan(event.clientX - active.lastX, event.clientY - active.lastY);
      active.lastX = event.clientX;
      active.lastY = event.clientY;
    } else {
      const [dx, dy] = [at.x - active.startX, at.y - active.startY];
      if (!active.isStarted && Math.hypot(dx, dy) < SLACK) return;
      active.isStarted = true;
      if (active.kind === "marquee") overlay.setState({ marquee: { left: Math.min(active.startX, at.x), right: Math.max(active.startX, at.x), top: Math.min(active.startY, at.y), bottom: Math.max(active.startY, at.y) } });
      else opts.setMoving(placesMoved(active.layout, active.ids, dx, dy));
    }
  };

  const hover = (at: { x: number; y: number }): void => {
    const { ruling } = layout!.frame;
    const isOnRuling = at.x >= ruling.left && at.x <= ruling.right;
    opts.onCursorAt(isOnRuling ? frequencyAt(ruling, at.x) : null);
    const hit = hitAt(at);
    const style = isSpaceDown.current ? "grab" : hit?.part === "knob" ? "ns-resize" : hit?.part === "value" ? "text" : hit ? "pointer" : "default";
    if (style !== cursorStyle) setCursorStyle(style);
  };

  const report = (moves: Parameters<SheetProps["onMove"]>[0], isCopy: boolean): void => {
    if (isCopy && props.onDuplicate) props.onDuplicate(moves);
    else props.onMove(moves);
  };

  const onPointerUp = (event: PointerEvent<HTMLDivElement>): void => {
    const active = gesture.current;
    if (!active || !layout) return;
    if (active.kind === "knob" && active.isStarted) props.onKnobEnd();
    if (active.kind === "pan") setCursorStyle("default");
    if (active.kind === "marquee") {
      const { marquee } = overlay.getState();
      if (active.isStarted && marquee) props.onSelect(blocksIn(layout, { ...marquee, top: Math.max(marquee.top, layout.frame.board.top) }), active.isAdding ? "add" : "replace");
      else if (!active.isAdding) props.onSelect([], "replace");
    }
    if (active.kind === "move") {
      if (active.isStarted && opts.moving && opts.moving.size > 0) report([...opts.moving].map(([id, at]) => ({ id, at })), event.altKey);
      // A click on one of several selected blocks picks that one.
      else if (!active.isStarted && active.ids.length > 1) props.onSelect([active.id], "replace");
    }
    element.current?.releasePointerCapture(event.pointerId);
    finish();
  };

  /** Takes back what the hand is doing; false where it does nothing. */
  const cancel = (): boolean => {
    const active = gesture.current;
    if (!active) return false;
    if (active.kind === "knob" && active.isStarted) props.onKnobCancel();
    finish();
    return true;
  };

  const onDoubleClick = (event: MouseEvent<HTMLDivElement>): void => {
    const hit = hitAt(point(event));
    if (hit?.part === "knob") {
      props.onKnobStart(hit.id);
      props.onKnobMove(hit.id, 0.5);
      props.onKnobEnd();
    } else if (hit?.part === "value") opts.onEdit(hit.value);
  };

  const onContextMenu = (event: MouseEvent<HTMLDivElement>): void => {
    event.preventDefault();
    const focused = event.target instanceof HTMLElement ? event.target.closest<HTMLElement>("[data-band], [data-block]") : null;
    const target = hitAt(point(event))?.id ?? focused?.dataset.band ?? focused?.dataset.block ?? null;
    if (target !== null && !props.selection.includes(target)) props.onSelect([target], "replace");
    props.onContextMenu({ clientX: event.clientX, clientY: event.clientY, target });
  };

  useWheel(element, (event) => {
    if (!layout) return;
    event.preventDefault();
    const lines = event.deltaMode === 1 ? 16 : 1;
    if (event.shiftKey && !event.ctrlKey) opts.onPan(-event.deltaX * lines, event.deltaX === 0 ? -event.deltaY * lines : 0);
    else if (Math.abs(event.deltaX) > Math.abs(event.deltaY)) opts.onPan(-event.deltaX * lines, 0);
    else opts.onZoom(Math.exp(-event.deltaY * lines * (event.ctrlKey ? 0.01 : 0.0016)), point(event));
  });

  return {
    cancel,
    cursorStyle,
    handlers: {
      onPointerDown, onPointerMove, onPointerUp, onDoubleClick, onContextMenu,
      onPointerCancel: cancel,
      onPointerLeave: () => {
        if (!gesture.current) opts.onCursorAt(null);
      },
    },
  };
}

/** New places of the blocks that a hand can move. */
function placesMoved(layout: SheetLayout, ids: readonly string[], dx: number, dy: number): Map<string, SheetPoint> {
  const places = new Map<string, SheetPoint>();
  for (const id of ids) {
    const place = movedPlace(layout, id, dx, dy);
    if (place) places.set(id, place);
  }
  return places;
}

/** The one block that is selected; null where none or several are. */
function onlyOf(selection: readonly string[]): string | null {
  return selection.length === 1 ? selection[0] : null;
}

/** The keyboard follows the hand: to the knob, else to the response or the board as a whole. A hand that points needs no ring. */
function focusFor(element: HTMLElement | null, hit: Hit | null, isOnResponse: boolean): void {
  const wanted = hit?.part === "knob"
    ? element?.querySelector<HTMLElement>(`[data-band="${CSS.escape(hit.id)}"]`)
    : isOnResponse ? element?.querySelector<HTMLElement>("[data-response]") : element;
  wanted?.focus({ preventScroll: true, focusVisible: false });
}

/** Whether the space bar is down while the sheet has the keyboard. */
function useSpaceKey(element: RefObject<HTMLElement | null>): RefObject<boolean> {
  const isDown = useRef(false);
  useEffect(() => {
    const down = (event: KeyboardEvent): void => {
      if (event.key !== " " || !(event.target instanceof HTMLElement)) return;
      const { target } = event;
      if (target !== document.body && !element.current?.contains(target)) return;
      if (target.closest("input, textarea, [role=button]")) return;
      isDown.current = true;
      event.preventDefault();
    };
    const up = (event: KeyboardEvent): void => {
      if (event.key === " ") isDown.current = false;
    };
    const lost = (): void => {
      isDown.current = false;
    };
    window.addEventListener("keydown", down);
    window.addEventListener("keyup", up);
    window.addEventListener("blur", lost);
    return () => {
      window.removeEventListener("keydown", down);
      window.removeEventListener("keyup", up);
      window.removeEventListener("blur", lost);
    };
  }, [element]);
  return isDown;
}

/** Wheel events that may be prevented: React's own are passive. */
function useWheel(element: RefObject<HTMLElement | null>, onWheel: (event: WheelEvent) => void): void {
  const latest = useRef(onWheel);
  useEffect(() => {
    latest.current = onWheel;
  });
  useEffect(() => {
    const target = element.current;
    if (!target) return undefined;
    const wheel = (event: WheelEvent): void => latest.current(event);
    target.addEventListener("wheel", wheel, { passive: false });
    return () => target.removeEventListener("wheel", wheel);
  }, [element]);
}
