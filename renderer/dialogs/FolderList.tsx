import { useId, type KeyboardEvent, type RefObject } from "react";
import type { ResultOf } from "../../core/contract/methods.ts";

export type Entry = ResultOf<"files.list">["entries"][number];

/** A row of the chooser: a project, a folder, the way up, or a demo. */
export interface FileRow {
  readonly key: string;
  readonly kind: "up" | "folder" | "project";
  readonly name: string;
  readonly detail?: string;
  readonly about?: string;
}

interface FolderListProps {
  readonly label: string;
  /** What stands there instead of rows. */
  readonly empty: string;
  readonly rows: readonly FileRow[];
  readonly index: number;
  readonly onIndex: (index: number) => void;
  readonly onChoose: (index: number) => void;
  readonly onKeyDown: (event: KeyboardEvent) => void;
  readonly focusRef?: RefObject<HTMLDivElement | null>;
}

const SIGNS = { up: "M9 15V4M4 9l5-5 5 5", folder: "M2 5h5l2 2h7v8H2z", project: "M2 9h3c2 0 2-5 4-5s2 10 4 10 1-5 3-5" };

/** A list that keys walk: one tab stop, the row in hand marked. */
export function FolderList({ label, empty, rows, index, onIndex, onChoose, onKeyDown, focusRef }: FolderListProps) {
  const id = useId();
  return (
    <div className="file-list" role="listbox" tabIndex={0} aria-label={label} aria-activedescendant={rows.length > 0 ? `${id}-${index}` : undefined} onKeyDown={onKeyDown} ref={focusRef}>
      {rows.length === 0 && <p className="file-list-empty">{empty}</p>}
      {rows.map((entry, at) => (
        // The list has the keys; the rows are only pointed at.
        // oxlint-disable-next-line jsx-a11y/click-events-have-key-events
        <div key={entry.key} id={`${id}-${at}`} ref={at === index ? showRow : undefined} className="file-row" role="option" aria-selected={at === index} onClick={() => onIndex(at)} onDoubleClick={() => onChoose(at)}>
          <svg viewBox="0 0 18 18" aria-hidden="true">
            <path d={SIGNS[entry.kind]} />
          </svg>
          <span>{entry.name}</span>
          <span className="quiet">{entry.detail}</span>
          {entry.about !== undefined && entry.about !== "" && <span className="file-about">{entry.about}</span>}
        </div>
      ))}
    </div>
  );
}

/** The folder of a file, by either system's separators; empty at the top. */
export function folderOf(path: string): string {
  return path.slice(0, Math.max(0, path.lastIndexOf("/"), path.lastIndexOf("\\")));
}

/** Scrolls the row in hand into view. */
export function showRow(row: HTMLElement | null): void {
  row?.scrollIntoView({ block: "nearest" });
}

/** The rows of a folder as the host lists it. */
export function folderRows(listing: ResultOf<"files.list">): FileRow[] {
  const entries = listing.entries.map(({ name, kind, path, modified }): FileRow => ({ key: path, kind, name: kind === "project" ? name.replace(/\.bandwright$/i, "") : name, detail: kind === "project" ? dayOf(modified) : "" }));
  return listing.parent === null ? entries : [{ key: listing.parent, kind: "up", name: "The folder above" }, ...entries];
}

function dayOf(modified: number): string {
  return new Date(modified).toLocaleDateString(undefined, { day: "numeric", month: "short", year: "numeric" });
}
