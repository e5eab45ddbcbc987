import { useRef, type KeyboardEvent, type PointerEvent } from "react";
import type { SheetLayout } from "../../core/geometry/layout.ts";

/** A board taller than its place by less than this has its margin out of sight, no more. */
const LEAST_SCROLL = 12;
const STEP = 40;

interface ScrollBarProps {
  readonly layout: SheetLayout;
  /** Id of what it scrolls. */
  readonly controls: string;
  readonly onScroll: (scroll: number) => void;
}

/** At the right edge: which part of the board is on show, where it is taller than its place. Dragged, clicked or keyed it moves there. */
export function ScrollBar({ layout, controls, onScroll }: ScrollBarProps) {
  const grip = useRef<{ readonly y: number; readonly scroll: number } | null>(null);
  const { scroll, mostScroll, frame } = layout;
  if (mostScroll < LEAST_SCROLL) return null;
  const seen = frame.board.bottom - frame.board.top;
  const length = (seen * seen) / (seen + mostScroll);
  const perPixel = mostScroll / (seen - length);
  const to = (next: number): void => onScroll(Math.max(0, Math.min(mostScroll, next)));

  const onPointerDown = (event: PointerEvent<HTMLDivElement>): void => {
    if (event.button !== 0) return;
    event.stopPropagation();
    event.preventDefault();
    const bar = event.currentTarget;
    bar.setPointerCapture(event.pointerId);
    const at = event.clientY - bar.getBoundingClientRect().top;
    const top = scroll / perPixel;
    // Beside the mark, its middle comes to the pointer.
    const start = at >= top && at <= top + length ? scroll : Math.max(0, Math.min(mostScroll, (at - length / 2) * perPixel));
    grip.current = { y: event.clientY, scroll: start };
    to(start);
  };
  const onPointerMove = (event: PointerEvent<HTMLDivElement>): void => {
    event.stopPropagation();
    if (grip.current) to(grip.current.scroll + (event.clientY - grip.current.y) * perPixel);
  };
  const onPointerEnd = (event: PointerEvent<HTMLDivElement>): void => {
    event.stopPropagation();
    grip.current = null;
  };
  const onKeyDown = (event: KeyboardEvent): void => {
    const next = { ArrowUp: scroll - STEP, ArrowDown: scroll + STEP, PageUp: scroll - seen * 0.8, PageDown: scroll + seen * 0.8, Home: 0, End: mostScroll }[event.key];
    if (next === undefined || event.ctrlKey || event.metaKey || event.altKey) return;
    event.preventDefault();
    event.stopPropagation();
    to(next);
  };
  return (
    <div
      className="sheet-scroll"
      role="scrollbar"
      tabIndex={0}
      aria-label="Part of the board on show"
      aria-controls={controls}
      aria-orientation="vertical"
      aria-valuemin={0}
      aria-valuemax={Math.round(mostScroll)}
      aria-valuenow={Math.round(scroll)}
      style={{ top: frame.board.top, height: seen }}
      onPointerDown={onPointerDown}
      onPointerMove={onPointerMove}
      onPointerUp={onPointerEnd}
      onPointerCancel={onPointerEnd}
      onDoubleClick={(event) => event.stopPropagation()}
      onKeyDown={onKeyDown}
    >
      <div style={{ top: scroll / perPixel, height: length }} />
    </div>
  );
}
