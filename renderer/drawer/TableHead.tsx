/** The title of a column; a figure's stands to the right, over its figures; one that needs none on the screen is for screen readers. */
export type ColumnHead = string | { readonly figure: string } | { readonly unseen: string };

/** One row of column titles. */
export function TableHead({ columns }: { readonly columns: readonly ColumnHead[] }) {
  return (
    <thead>
      <tr>
        {columns.map((column) =>
          typeof column === "string" ? (
            <th key={column} scope="col">
              {column}
            </th>
          ) : "figure" in column ? (
            <th key={column.figure} scope="col" className="is-number">
              {column.figure}
            </th>
          ) : (
            <th key={column.unseen} scope="col">
              <span className="visually-hidden">{column.unseen}</span>
            </th>
          ),
        )}
      </tr>
    </thead>
  );
}
