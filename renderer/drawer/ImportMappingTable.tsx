import { IMPORT_FIELDS, type ColumnUse, type Delimiter, type Encoding, type ImportField, type ImportMapping, type TableReading } from "../../core/drawer/mapping.ts";
import { STOCK_KINDS, type StockKind } from "../../core/drawer/stock.ts";
import type { ResultOf } from "../../core/contract/methods.ts";
import { costText, KIND_NAMES, lineName, ratingText } from "./line-text.ts";
import { unitCost } from "../../core/drawer/stock.ts";

interface ImportMappingTableProps {
  readonly preview: ResultOf<"drawer.importPreview">;
  readonly name: string;
  readonly onReading: (reading: TableReading) => void;
  readonly onMapping: (mapping: ImportMapping) => void;
}

const FIELD_NAMES: Readonly<Record<ImportField, string>> = {
  id: "id", kind: "kind", value: "value", type: "op-amp type", tolerance: "tolerance", rating: "rating", technology: "technology", temperatureCoefficient: "temp. coefficient", windingR: "winding resistance", package: "package", location: "location",
  quantity: "quantity", prices: "all prices", price: "price", currency: "currency", supplier: "supplier", orderCode: "order code", notes: "notes", retired: "retired",
};
const UNITS: Partial<Readonly<Record<ImportField, readonly string[]>>> = {
  value: ["", "p", "n", "µ", "m", "k", "M", "pF", "nF", "µF", "mH", "H", "Ω", "kΩ", "MΩ"], tolerance: ["", "%"], rating: ["", "mW", "W", "V", "kV"], temperatureCoefficient: ["", "ppm"], windingR: ["", "m", "Ω", "kΩ"],
};
const DELIMITER_NAMES: readonly (readonly [Delimiter, string])[] = [[",", "comma"], [";", "semicolon"], ["\t", "tab"], ["|", "bar |"]];
const ENCODING_NAMES: readonly (readonly [Encoding, string])[] = [["utf-8", "UTF-8"], ["windows-1252", "Western (Windows-1252)"], ["utf-16le", "UTF-16"]];
const SHOWN = 8;

/** The mapping with a column put to another use; a field that only one column can have is taken from the one that had it. */
export function withColumn(mapping: ImportMapping, column: number, field: ImportField | null, change: Partial<Pick<ColumnUse, "unit" | "from">> = {}): ImportMapping {
  const others = mapping.columns.filter((use) => use.column !== column && (field === null || field === "price" || use.field !== field));
  const old = mapping.columns.find((use) => use.column === column);
  if (field === null) return { ...mapping, columns: others };
  const use: ColumnUse = { column, field, unit: old?.field === field ? old.unit : "", from: old?.field === field ? old.from : 1, ...change };
  return { ...mapping, columns: [...others, use].toSorted((a, b) => a.column - b.column) };
}

/** How the table is read, what each column means, and how the first rows would be taken. */
export function ImportMappingTable({ preview, name, onReading, onMapping }: ImportMappingTableProps) {
  const { reading, mapping, headers, rows } = preview;
  const uses = new Map(mapping.columns.map((use) => [use.column, use]));
  const width = Math.max(headers.length, ...rows.map((row) => row.cells.length));
  const columns = Array.from({ length: width }, (_, column) => column);
  const headerOf = (column: number): string => (headers[column]?.trim() ? headers[column] : `column ${column + 1}`);
  return (
    <>
      <div className="import-reading">
        <strong className="path">{name}</strong>
        <label>
          cells divided by
          <select value={reading.delimiter} onChange={(event) => onReading({ ...reading, delimiter: event.target.value as Delimiter })}>
            {DELIMITER_NAMES.map(([value, label]) => (
              <option key={value} value={value}>
                {label}
              </option>
            ))}
          </select>
        </label>
        <label>
          text in
          <select value={reading.encoding} onChange={(event) => onReading({ ...reading, encoding: event.target.value as Encoding })}>
            {ENCODING_NAMES.map(([value, label]) => (
              <option key={value} value={value}>
                {label}
              </option>
            ))}
          </select>
        </label>
        <label className="check">
          <input type="checkbox" checked={reading.hasHeader} onChange={(event) => onReading({ ...reading, hasHeader: event.target.checked })} />
          first line names the columns
        </label>
        <label>
          where a row names no kind
          <select value={mapping.defaults.kind ?? ""} onChange={(event) => onMapping({ ...mapping, defaults: { ...mapping.defaults, kind: event.target.value === "" ? null : (event.target.value as StockKind) } })}>
            <option value="">by its value</option>
            {STOCK_KINDS.map((kind) => (
              <option key={kind} value={kind}>
                {KIND_NAMES[kind].one}
              </option>
            ))}
          </select>
        </label>
      </div>
      <div className="import-table" role="region" aria-label="Columns and first rows" tabIndex={0}>
        <table className="list-table">
          <thead>
            <tr>
              <th scope="col" className="is-number">
                line
              </th>
              {columns.map((column) => {
                const use = uses.get(column);
                return (
                  <th key={column} scope="col">
                    <span className="import-header">{headerOf(column)}</span>
                    <select aria-label={`Meaning of ${headerOf(column)}`} value={use?.field ?? ""} onChange={(event) => onMapping(withColumn(mapping, column, event.target.value === "" ? null : (event.target.value as ImportField)))}>
                      <option value="">– left out –</option>
                      {IMPORT_FIELDS.map((field) => (
                        <option key={field} value={field}>
                          {FIELD_NAMES[field]}
                        </option>
                      ))}
                    </select>
                    {use !== undefined && UNITS[use.field] !== undefined && (
                      <select aria-label={`Unit of bare numbers in ${headerOf(column)}`} value={use.unit} onChange={(event) => onMapping(withColumn(mapping, column, use.field, { unit: event.target.value }))}>
                        {[...new Set([...UNITS[use.field]!, use.unit])].map((unit) => (
                          <option key={unit} value={unit}>
                            {unit === "" ? "as written" : unit}
                          </option>
                        ))}
                      </select>
                    )}
                    {use?.field === "price" && (
                      <label className="import-from">
                        from
                        <input type="number" min={1} aria-label={`Pieces from which ${headerOf(column)} holds`} value={use.from} onChange={(event) => onMapping(withColumn(mapping, column, "price", { from: Math.max(1, Math.floor(Number(event.target.value)) || 1) }))} />
                      </label>
                    )}
                  </th>
                );
              })}
              <th scope="col" className="is-taken">
                taken as
              </th>
            </tr>
          </thead>
          <tbody>
            {rows.slice(0, SHOWN).map((row) => (
              <tr key={row.row} className={row.problems.length > 0 ? "is-refused" : undefined}>
                <td className="is-number">{row.row}</td>
                {columns.map((column) => (
                  <td key={column} className={uses.has(column) ? undefined : "is-unused"}>
                    {row.cells[column] ?? ""}
                  </td>
                ))}
                <td className="is-taken">{row.line === null ? `✕ ${row.problems.join("; ")}` : takenText(row.line, row.quantity)}</td>
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </>
  );
}

type Line = NonNullable<ResultOf<"drawer.importPreview">["rows"][number]["line"]>;

/** `resistor 4k7 metal film 1 %, 0.25 W, 20 pieces, 0.04 EUR` */
function takenText(line: Line, quantity: number | null): string {
  const cost = unitCost(line, 1);
  return [`${KIND_NAMES[line.kind].one} ${lineName(line)}`, line.rating === null ? "" : ratingText(line), quantity === null ? "" : `${quantity} there`, cost === null ? "" : costText(cost, line.currency)].filter((part) => part !== "").join(", ");
}
