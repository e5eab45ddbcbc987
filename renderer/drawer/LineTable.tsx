import { defaultRangeExtractor, useVirtualizer } from "@tanstack/react-virtual";
import { memo, useCallback, useEffect, useId, useLayoutEffect, useRef, useState, type KeyboardEvent, type MouseEvent, type ReactNode } from "react";
import type { DrawerLine, LineSort } from "../../core/contract/drawer-schemas.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { isChord } from "../editor/actions/chords.ts";
import { useShell } from "../editor/hooks.ts";
import { CellEditor } from "./CellEditor.tsx";
import { COLUMNS, nextEditable } from "./columns.ts";
import { useDrawer, useDrawerState } from "./hooks.ts";
import "./line-table.css";
import { valueText } from "./line-text.ts";
import { isChosen, NOTHING_CHOSEN, toggled } from "./selection.ts";

const ROW = 30;
const AHEAD = 150;
const TICK_REACH = 30;
const TEMPLATE = COLUMNS.map((column, index) => (index === COLUMNS.length - 1 ? `minmax(${column.width}px, 1fr)` : `${column.width}px`)).join(" ");
const WIDTH = COLUMNS.reduce((sum, column) => sum + column.width, 0);

/** The lines as a grid that the keyboard walks: one stop of the Tab key, one cell in hand, rows fetched as they come into sight. */
export function LineTable() {
  const { context } = useShell();
  const drawer = useDrawer();
  const total = useDrawerState((s) => s.total) ?? 0;
  const sort = useDrawerState((s) => s.sort);
  const chosen = useDrawerState((s) => s.chosen);
  const at = useDrawerState((s) => s.at);
  const seen = useDrawerState((s) => s.seen);
  const id = useId();
  const scroller = useRef<HTMLDivElement>(null);
  const anchor = useRef(0);
  const [editing, setEditing] = useState<number | null>(null);
  // Only this component asks it anything, and anew in every render.
  // oxlint-disable-next-line react/incompatible-library
  const rows = useVirtualizer({
    count: total, getScrollElement: () => scroller.current, estimateSize: () => ROW, overscan: 8, paddingStart: ROW, scrollPaddingStart: ROW,
    // The cell in hand stays in the page, wherever the wheel has gone: screen readers follow it there.
    rangeExtractor: (range) => [...new Set([...defaultRangeExtractor(range), ...(at.row >= 0 && at.row < total ? [at.row] : [])])].sort((a, b) => a - b),
  });
  const items = rows.getVirtualItems();
  const [first, last] = [rows.range?.startIndex ?? 0, rows.range?.endIndex ?? 0];

  useEffect(() => {
    // A little beyond what is in sight, so that a fling finds most of it there.
    drawer.windows.want(first - AHEAD, last + AHEAD);
  }, [drawer, first, last, seen]);

  const go = (row: number, column: number): void => {
    const to = { row: Math.max(-1, Math.min(total - 1, row)), column: Math.max(0, Math.min(COLUMNS.length - 1, column)) };
    drawer.setPlace(to);
    if (to.row >= 0) rows.scrollToIndex(to.row);
    showColumn(scroller.current, to.column);
  };
  const walk = (row: number, isExtending: boolean): void => {
    go(row, at.column);
    if (isExtending) void drawer.chooseRange(anchor.current, Math.max(0, Math.min(total - 1, row)));
    else anchor.current = Math.max(0, row);
  };
  const startEdit = (column = at.column): void => {
    if (at.row < 0) sortBy(drawer, sort, COLUMNS[at.column].key);
    else if (drawer.lineInHand() && COLUMNS[column].edit) setEditing(column);
    else if (drawer.lineInHand()) context.ui.notify(column === 0 ? "A line keeps its id: projects refer to it." : `“${COLUMNS[column].label}” follows from the others and is not typed.`);
  };
  const leave = (move: "stay" | "down" | "next" | "back"): void => {
    setEditing(null);
    scroller.current?.focus({ preventScroll: true });
    if (move === "down") go(at.row + 1, at.column);
    if (move === "next" || move === "back") {
      const next = nextEditable(editing ?? at.column, move === "next" ? 1 : -1);
      if (next < 0) return;
      go(at.row, next);
      setEditing(next);
    }
  };

  const onKeyDown = (event: KeyboardEvent): void => {
    if (editing !== null) return;
    const { isMac } = context;
    const page = Math.max(1, Math.floor((scroller.current?.clientHeight ?? 300) / ROW) - 2);
    const isMod = isMac ? event.metaKey : event.ctrlKey;
    const isPlain = !isMod && !event.altKey;
    if (event.key === "ArrowDown" && isPlain) walk(at.row + 1, event.shiftKey);
    else if (event.key === "ArrowUp" && isPlain) walk(event.shiftKey ? Math.max(0, at.row - 1) : at.row - 1, event.shiftKey);
    else if (event.key === "PageDown" && isPlain) walk(at.row + page, event.shiftKey);
    else if (event.key === "PageUp" && isPlain) walk(Math.max(0, at.row - page), event.shiftKey);
    else if (event.key === "Home" && isMod) walk(0, event.shiftKey);
    else if (event.key === "End" && isMod) walk(total - 1, event.shiftKey);
    else if (event.key === "Home" && isPlain) go(at.row, 0);
    else if (event.key === "End" && isPlain) go(at.row, COLUMNS.length - 1);
    else if (event.key === "ArrowRight" && isPlain) go(at.row, at.column + 1);
    else if (event.key === "ArrowLeft" && isPlain) go(at.row, at.column - 1);
    else if (event.key === " " && isPlain) {
      const line = drawer.lineInHand();
      if (line) drawer.choose(toggled(chosen, line.id));
      anchor.current = Math.max(0, at.row);
    } else if (isChord(event, "Mod+A", isMac)) drawer.chooseAll();
    else if (event.key === "Escape") drawer.choose(NOTHING_CHOSEN);
    else if (event.key === "Enter" || event.key === "F2") startEdit();
    else if (event.key === "Delete") run(actionById("drawer-retire"), context);
    else return;
    event.preventDefault();
  };

  // Handlers that stay the same, so that only the rows that change are rendered again.
  const onRowClick = useCallback(
    (event: MouseEvent, row: number, column: number, line: DrawerLine): void => {
      scroller.current?.focus({ preventScroll: true });
      drawer.setPlace({ row, column });
      // The tick and the room about it: it is small.
      const isOnTick = column === 0 && event.clientX - event.currentTarget.getBoundingClientRect().left < TICK_REACH;
      if (event.shiftKey) {
        void drawer.chooseRange(anchor.current, row);
        return;
      }
      anchor.current = row;
      if (isOnTick || event.ctrlKey || event.metaKey) drawer.choose(toggled(drawer.store.getState().chosen, line.id));
    },
    [drawer],
  );
  const latestEdit = useRef(startEdit);
  useLayoutEffect(() => {
    latestEdit.current = startEdit;
  });
  const onEdit = useCallback((column: number): void => latestEdit.current(column), []);

  return (
    <div
      ref={scroller}
      className="line-table"
      role="grid"
      aria-label="Lines of the drawer"
      aria-multiselectable="true"
      aria-rowcount={total + 1}
      aria-colcount={COLUMNS.length}
      aria-activedescendant={editing === null ? cellId(id, at.row, at.column) : undefined}
      tabIndex={0}
      onKeyDown={onKeyDown}
    >
      <div className="line-sizer" role="presentation" style={{ height: Math.max(ROW, rows.getTotalSize()), minWidth: WIDTH }}>
        <div className="line-head" role="row" aria-rowindex={1} style={{ gridTemplateColumns: TEMPLATE, height: ROW }}>
          {COLUMNS.map((column, index) => {
            const isSorted = sort.by === column.key;
            return (
              // The grid has the keys; a header in hand sorts on Enter.
              // oxlint-disable-next-line jsx-a11y/click-events-have-key-events
              <div
                key={column.key}
                id={cellId(id, -1, index)}
                role="columnheader"
                aria-colindex={index + 1}
                aria-sort={isSorted ? (sort.descending ? "descending" : "ascending") : "none"}
                className={`line-cell${column.isNumber ? " is-number" : ""}${at.row === -1 && at.column === index ? " is-at" : ""}`}
                title={`Sort by ${column.label}`}
                onClick={() => sortBy(drawer, sort, column.key)}
              >
                {column.label}
                <span aria-hidden="true">{isSorted ? (sort.descending ? " ▾" : " ▴") : ""}</span>
              </div>
            );
          })}
        </div>
        {items.map(({ index, start }) => {
          const line = drawer.windows.at(index);
          const column = index === at.row ? at.column : null;
          return (
            <TableRow key={index} id={id} index={index} top={start} line={line} column={column} isChosen={line !== undefined && isChosen(chosen, line.id)} onClick={onRowClick} onEdit={onEdit}>
              {index === at.row && editing !== null && line !== undefined ? { column: editing, editor: <CellEditor key={`${line.id}.${editing}`} line={line} column={COLUMNS[editing]} onLeave={leave} /> } : null}
            </TableRow>
          );
        })}
      </div>
    </div>
  );
}

function sortBy(drawer: ReturnType<typeof useDrawer>, sort: LineSort, by: LineSort["by"]): void {
  drawer.setSort({ by, descending: sort.by === by && !sort.descending });
}

function cellId(grid: string, row: number, column: number): string {
  return `${grid}-${row < 0 ? "head" : row}-${column}`;
}

/** Scrolls sideways as far as it takes to see a column, clear of the first one, which stays. */
function showColumn(scroller: HTMLElement | null, column: number): void {
  if (!scroller || column === 0) return;
  const left = COLUMNS.slice(0, column).reduce((sum, c) => sum + c.width, 0);
  const right = left + COLUMNS[column].width;
  if (left - COLUMNS[0].width < scroller.scrollLeft) scroller.scrollLeft = left - COLUMNS[0].width;
  else if (right > scroller.scrollLeft + scroller.clientWidth) scroller.scrollLeft = right - scroller.clientWidth;
}

interface TableRowProps {
  readonly id: string;
  readonly index: number;
  readonly top: number;
  readonly line: DrawerLine | undefined;
  /** The column in hand; null where another row is. */
  readonly column: number | null;
  readonly isChosen: boolean;
  readonly onClick: (event: MouseEvent, row: number, column: number, line: DrawerLine) => void;
  readonly onEdit: (column: number) => void;
  readonly children: { readonly column: number; readonly editor: ReactNode } | null;
}

const TableRow = memo(function TableRow({ id, index, top, line, column, isChosen: isTicked, onClick, onEdit, children }: TableRowProps) {
  return (
    <div
      className={`line-row${isTicked ? " is-chosen" : ""}${line?.retired ? " is-retired" : ""}${index % 2 === 1 ? " is-odd" : ""}`}
      role="row"
      aria-rowindex={index + 2}
      aria-selected={isTicked}
      aria-busy={line === undefined}
      style={{ gridTemplateColumns: TEMPLATE, height: ROW, transform: `translateY(${top}px)` }}
    >
      {COLUMNS.map((one, at) => (
        // The grid has the keys.
        // oxlint-disable-next-line jsx-a11y/click-events-have-key-events
        <div
          key={one.key}
          id={cellId(id, index, at)}
          role="gridcell"
          aria-colindex={at + 1}
          aria-readonly={!one.edit}
          aria-label={line && one.key === "value" ? valueText(line) : undefined}
          className={`line-cell${one.isNumber ? " is-number" : ""}${column === at ? " is-at" : ""}${line && one.key === "available" && line.quantity - line.reserved === 0 ? " is-none" : ""}`}
          title={line && one.key !== "value" ? one.text(line) : line && valueText(line)}
          onClick={(event) => line && onClick(event, index, at, line)}
          onDoubleClick={() => line && onEdit(at)}
        >
          {at === 0 && <span className="line-tick" aria-hidden="true">{isTicked ? "✓" : ""}</span>}
          {children?.column === at ? children.editor : <span className="line-text">{line ? one.text(line) : at === 0 ? "…" : ""}</span>}
          {at === 0 && line?.retired && <span className="line-flag">retired</span>}
        </div>
      ))}
    </div>
  );
});
