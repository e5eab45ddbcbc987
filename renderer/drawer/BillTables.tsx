import type { Bill } from "../../core/drawer/bill.ts";
import type { listedProblems } from "../../core/drawer/board-problems.ts";
import { QUANTITY_OF } from "../../core/drawer/check-line.ts";
import { formatValue } from "../../core/units.ts";
import { KIND_NAMES, lineName } from "./line-text.ts";
import { moneysText, sumText } from "./swap-text.ts";
import { ProblemList } from "./ProblemList.tsx";
import { TableHead } from "./TableHead.tsx";

/** The bill of a build: shopping list by supplier, what has no line, what is to be weighed, and every line that is taken. */
export function BillTables({ bill, findings }: { readonly bill: Bill; readonly findings: ReturnType<typeof listedProblems> }) {
  return (
    <>
      {bill.shopping.length > 0 && <Shopping bill={bill} />}
      {bill.unassigned.length > 0 && <Unassigned bill={bill} />}
      {findings.length > 0 && (
        <section aria-label="To weigh">
          <h3>To weigh</h3>
          <ProblemList found={findings} />
        </section>
      )}
      {bill.rows.length > 0 && <Rows bill={bill} />}
    </>
  );
}

function Shopping({ bill }: { readonly bill: Bill }) {
  return (
    <section aria-label="Shopping list">
      <h3>Shopping list</h3>
      {bill.shopping.map((group) => (
        <table key={group.supplier} className="list-table">
          <caption>
            {group.supplier === "" ? "No supplier named" : group.supplier}: {moneysText(group.cost)}
          </caption>
          <TableHead columns={["line", "order code", { figure: "missing" }, { figure: "buy" }, { figure: "cost" }]} />
          <tbody>
            {group.items.map((item) => (
              <tr key={item.line.id}>
                <td>
                  {item.line.id}
                  <span className="list-note">{lineName(item.line)}</span>
                </td>
                <td>{item.line.orderCode}</td>
                <td className="is-number">{item.short}</td>
                <td className="is-number">
                  {item.buy}
                  {item.insteadOf !== null && <span className="list-note">cheaper than {item.short}: {sumText(item.insteadOf)}</span>}
                </td>
                <td className="is-number">{item.cost === null ? "no price" : sumText(item.cost)}</td>
              </tr>
            ))}
          </tbody>
        </table>
      ))}
    </section>
  );
}

function Unassigned({ bill }: { readonly bill: Bill }) {
  return (
    <section aria-label="Without a line">
      <h3>Without a line of the drawer</h3>
      <ul className="report-list">
        {bill.unassigned.map((row) => {
          const quantity = QUANTITY_OF[row.kind];
          const what = quantity === null || row.value === null ? row.type : formatValue(row.value, quantity);
          return (
            <li key={`${row.kind} ${row.value} ${row.type} ${row.missing}`}>
              <strong>
                {row.total} × {what} {KIND_NAMES[row.kind].one}
              </strong>
              {row.missing === null ? "" : `, named ${row.missing}, which the drawer does not have`}
              <span className="list-note">{row.roles.join(", ")}</span>
            </li>
          );
        })}
      </ul>
    </section>
  );
}

function Rows({ bill }: { readonly bill: Bill }) {
  return (
    <section aria-label="Parts taken">
      <h3>Parts taken</h3>
      <table className="list-table">
        <TableHead columns={["line", { figure: "a unit" }, { figure: "all" }, { figure: "free now" }, { figure: "left" }, { figure: "cost" }]} />
        <tbody>
          {bill.rows.map((row) => (
            <tr key={row.line.id} className={row.short > 0 ? "is-short" : undefined}>
              <td title={row.roles.join(", ")}>
                {row.line.id}
                <span className="list-note">{lineName(row.line)}</span>
              </td>
              <td className="is-number">{row.perUnit}</td>
              <td className="is-number">{row.total}</td>
              <td className="is-number">{row.available}</td>
              <td className="is-number">{row.short > 0 ? `${row.short} missing` : row.left}</td>
              <td className="is-number">{row.cost === null ? "no price" : sumText(row.cost)}</td>
            </tr>
          ))}
        </tbody>
      </table>
    </section>
  );
}
