import { useMemo, useState } from "react";
import { dampingText, qText, radText, rootFrequencyText, sortedRows, type RootColumn, type RootRow, type Sorting } from "./roots-model.ts";

const COLUMNS: readonly { readonly column: RootColumn; readonly label: string; readonly title: string }[] = [
  { column: "kind", label: "root", title: "Pole × or zero ○" },
  { column: "frequency", label: "frequency", title: "Distance from the origin, |s|/2π" },
  { column: "q", label: "Q", title: "Of complex pairs: |s|/(−2·Re s)" },
  { column: "damping", label: "damping ζ", title: "−Re s/|s|: 1 real, 0 at the edge, below 0 unstable" },
  { column: "re", label: "Re s, rad/s", title: "Real part" },
  { column: "im", label: "Im s, rad/s", title: "Imaginary part" },
  { column: "block", label: "block", title: "The block to which a pole belongs most, by participation; zeros belong to the whole path" },
];

interface RootsTableProps {
  readonly rows: readonly RootRow[];
  readonly selected: readonly string[];
  readonly nameOf: (id: string) => string;
  readonly onPick: (row: RootRow) => void;
}

/** Every pole and zero with its figures; a heading sorts, a row selects its block. */
export function RootsTable({ rows, selected, nameOf, onPick }: RootsTableProps) {
  const [sorting, setSorting] = useState<Sorting>({ column: "frequency", isDescending: false });
  const sorted = useMemo(() => sortedRows(rows, sorting, nameOf), [rows, sorting, nameOf]);
  return (
    <div className="table-scroll">
      <table className="plain-table is-hoverable" aria-label="Poles and zeros">
        <thead>
          <tr>
            {COLUMNS.map(({ column, label, title }) => {
              const isSorted = column === sorting.column;
              return (
                <th key={column} scope="col" className={column === "block" ? "is-text" : undefined} aria-sort={isSorted ? (sorting.isDescending ? "descending" : "ascending") : undefined}>
                  <button type="button" className="sort-button" title={title} onClick={() => setSorting({ column, isDescending: isSorted && !sorting.isDescending })}>
                    {label}
                    <span aria-hidden="true">{isSorted ? (sorting.isDescending ? " ▾" : " ▴") : ""}</span>
                  </button>
                </th>
              );
            })}
          </tr>
        </thead>
        <tbody>
          {sorted.map((row) => (
            // The button in the last cell does the same for keys.
            // oxlint-disable-next-line jsx-a11y/click-events-have-key-events
            <tr key={row.key} data-root-row={row.kind} className={rowClass(row, selected)} onClick={() => onPick(row)}>
              <th scope="row">
                <span aria-hidden="true">{row.kind === "pole" ? "× " : "○ "}</span>
                {row.kind}
                {row.isUnstable && <span className="unstable-tag"> unstable</span>}
              </th>
              <td>{rootFrequencyText(row)}</td>
              <td>{qText(row)}</td>
              <td>{dampingText(row)}</td>
              <td>{radText(row.re)}</td>
              <td>
                {row.isPair && "±"}
                {radText(row.im)}
              </td>
              <td className="is-text">
                {row.block === null ? (
                  <span className="quiet">–</span>
                ) : (
                  <button
                    type="button"
                    className="link-button"
                    aria-pressed={selected.includes(row.block)}
                    onClick={(event) => {
                      event.stopPropagation();
                      onPick(row);
                    }}
                  >
                    {nameOf(row.block)}
                  </button>
                )}
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}

function rowClass(row: RootRow, selected: readonly string[]): string | undefined {
  if (row.isUnstable) return "is-unstable";
  return row.block !== null && selected.includes(row.block) ? "is-selected" : undefined;
}
