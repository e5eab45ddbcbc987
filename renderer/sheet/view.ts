/** What part of the sheet is on show, and how it moves. */
import { useCallback, useState } from "react";
import { layoutSheet, type LayoutOpts, type SheetLayout } from "../../core/geometry/layout.ts";
import { frequencyAt, moveSpan, zoomSpan, type Span } from "../../core/geometry/ruling.ts";

export interface View {
  /** Frequencies on show; null for all. */
  readonly span: Span | null;
  /** Pixels that the board is scrolled down. */
  readonly scroll: number;
}

const FITTED: View = { span: null, scroll: 0 };

export type Whole = Pick<LayoutOpts, "project" | "figures" | "width" | "height" | "topInset" | "hasResponse" | "range">;

/** The view zoomed by a factor about a point of the sheet, which keeps its frequency and its place on the board. */
export function zoomedView(whole: Whole, layout: SheetLayout, factor: number, at: { x: number; y: number }): View {
  const { ruling, limits, board } = layout.frame;
  const about = frequencyAt(ruling, Math.max(ruling.left, Math.min(ruling.right, at.x)));
  const span = zoomSpan(ruling, limits, factor, about);
  const isWhole = Math.log(limits.to / limits.from) - Math.log(span.to / span.from) < 1e-6;
  const next = layoutSheet({ ...whole, span: isWhole ? null : span, scroll: layout.scroll });
  const seen = board.bottom - board.top;
  const [before, after] = [layout.mostScroll + seen, next.mostScroll + next.frame.board.bottom - next.frame.board.top];
  const y = Math.max(0, at.y - board.top);
  const scroll = Math.max(0, Math.min(next.mostScroll, ((layout.scroll + y) * after) / before - y));
  return { span: isWhole ? null : span, scroll };
}

/** The view after the sheet was pushed by some pixels. */
export function pannedView(view: View, layout: SheetLayout, dx: number, dy: number): View {
  const { ruling, limits } = layout.frame;
  const ratio = Math.log(ruling.to / ruling.from) / (ruling.right - ruling.left);
  return {
    span: view.span && moveSpan(ruling, limits, Math.exp(-dx * ratio)),
    scroll: Math.max(0, Math.min(layout.mostScroll, layout.scroll - dy)),
  };
}

function beyond(value: number, least: number, most: number): number {
  if (value < least) return least - value;
  return value > most ? most - value : 0;
}

/** The view moved just far enough to show a place. */
export function revealingView(view: View, layout: SheetLayout, at: { x: number; y: number }): View {
  const { ruling, board } = layout.frame;
  const dx = beyond(at.x, ruling.left + 40, ruling.right - 40);
  const dy = beyond(at.y, board.top + 40, board.bottom - 40);
  return dx === 0 && dy === 0 ? view : pannedView(view, layout, view.span ? dx : 0, dy);
}

/** The view of one sheet, with setters that read the latest layout. */
export function useView(): { view: View; setView: (view: View) => void; fit: () => void } {
  const [view, setView] = useState<View>(FITTED);
  const fit = useCallback(() => setView(FITTED), []);
  return { view, setView, fit };
}
