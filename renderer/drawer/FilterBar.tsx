import { Popover } from "@base-ui/react/popover";
import { useEffect, useRef, useState } from "react";
import { EVERY_LINE, type LineFilter } from "../../core/contract/drawer-schemas.ts";
import type { StockKind } from "../../core/drawer/stock.ts";
import { formatValue } from "../../core/units.ts";
import { useDrawer, useDrawerState } from "./hooks.ts";
import { counted, KIND_NAMES, toleranceText } from "./line-text.ts";

const PAUSE = 90;
/** The command Find lines looks for it by this. */
const SEARCH_ID = "drawer-search";

/** What narrows the table: anything typed, and the choices of each column with their counts. */
export function FilterBar() {
  const drawer = useDrawer();
  const filter = useDrawerState((s) => s.filter);
  const total = useDrawerState((s) => s.total);
  const isLooking = useDrawerState((s) => s.isLooking);
  const all = useDrawerState((s) => s.info?.lines);
  const isFiltered = Object.keys(EVERY_LINE).some((key) => JSON.stringify(filter[key as keyof LineFilter]) !== JSON.stringify(EVERY_LINE[key as keyof LineFilter]));
  return (
    <div className="filter-bar" role="search" aria-label="Filter the lines">
      <SearchField />
      <FacetMenu name="kind" label="kind" />
      <FacetMenu name="technology" label="technology" />
      <FacetMenu name="tolerance" label="tolerance" />
      <FacetMenu name="package" label="package" />
      <FacetMenu name="supplier" label="supplier" />
      <FacetMenu name="location" label="location" />
      <label className="check">
        <input type="checkbox" checked={filter.onlyAvailable} onChange={(event) => drawer.setFilter({ onlyAvailable: event.target.checked })} />
        free only
      </label>
      <label className="check">
        <input type="checkbox" checked={filter.withRetired} onChange={(event) => drawer.setFilter({ withRetired: event.target.checked })} />
        retired too
      </label>
      {isFiltered && (
        <button type="button" className="button is-small" onClick={() => drawer.setFilter(EVERY_LINE)}>
          Show all
        </button>
      )}
      <p className="filter-count" role="status">
        {total === null || isLooking ? "…" : isFiltered && all !== undefined ? `${counted(total, "line")} of ${all.toLocaleString("en").replaceAll(",", " ")}` : counted(total, "line")}
      </p>
    </div>
  );
}

function SearchField() {
  const drawer = useDrawer();
  const text = useDrawerState((s) => s.filter.text);
  const [draft, setDraft] = useState<string | null>(null);
  const timer = useRef<ReturnType<typeof setTimeout>>(undefined);
  useEffect(() => () => clearTimeout(timer.current), []);
  const take = (next: string): void => {
    clearTimeout(timer.current);
    setDraft(null);
    if (next !== drawer.store.getState().filter.text) drawer.setFilter({ text: next });
  };
  return (
    <input
      id={SEARCH_ID}
      className="text-input search-input"
      type="search"
      aria-label="Find lines"
      placeholder="4k7 film, 100n 63V, maker, place …"
      maxLength={500}
      value={draft ?? text}
      autoComplete="off"
      spellCheck={false}
      onChange={(event) => {
        const next = event.target.value;
        setDraft(next);
        clearTimeout(timer.current);
        timer.current = setTimeout(() => take(next), PAUSE);
      }}
      onKeyDown={(event) => {
        if (event.key === "Enter" || event.key === "ArrowDown") {
          take(draft ?? text);
          document.querySelector<HTMLElement>(".line-table")?.focus();
          event.preventDefault();
        } else if (event.key === "Escape" && (draft ?? text) !== "") {
          take("");
          event.preventDefault();
        }
      }}
    />
  );
}

type FacetName = "kind" | "technology" | "tolerance" | "package" | "supplier" | "location";
type Choice = string | number | null;

function choiceText(name: FacetName, value: Choice): string {
  if (name === "kind") return KIND_NAMES[value as StockKind].many.toLowerCase();
  if (name === "tolerance") return value === null ? "none given" : toleranceText(value as number);
  return value === "" ? "none given" : String(value);
}

function FacetMenu({ name, label }: { readonly name: FacetName; readonly label: string }) {
  const drawer = useDrawer();
  const chosen = useDrawerState((s) => s.filter[name]) as readonly Choice[];
  const found = useDrawerState((s) => s.facets?.[name]) as readonly { readonly value: Choice; readonly count: number }[] | undefined;
  // What is chosen stays in the list, even where nothing fits it any more.
  const rows = [...(found ?? []), ...chosen.filter((value) => !found?.some((row) => row.value === value)).map((value) => ({ value, count: 0 }))];
  const toggle = (value: Choice, isOn: boolean): void => {
    const next = isOn ? [...chosen, value] : chosen.filter((one) => one !== value);
    drawer.setFilter({ [name]: next });
  };
  const summary = chosen.length === 0 ? label : chosen.length === 1 ? `${label}: ${choiceText(name, chosen[0])}` : `${label}: ${chosen.length}`;
  return (
    <Popover.Root>
      <Popover.Trigger className={chosen.length > 0 ? "facet-button is-on" : "facet-button"}>
        {summary} <span aria-hidden="true">▾</span>
      </Popover.Trigger>
      <Popover.Portal>
        <Popover.Positioner className="positioner" side="bottom" align="start" sideOffset={4}>
          <Popover.Popup className="popup facet-popup">
            <Popover.Title className="visually-hidden">{label}</Popover.Title>
            {rows.length === 0 && <p className="quiet">Nothing to choose from.</p>}
            {rows.slice(0, 200).map((row) => (
              <label key={String(row.value)} className="facet-row">
                <input type="checkbox" checked={chosen.includes(row.value)} onChange={(event) => toggle(row.value, event.target.checked)} />
                <span>{choiceText(name, row.value)}</span>
                <span className="quiet">{row.count.toLocaleString("en").replaceAll(",", " ")}</span>
              </label>
            ))}
            {chosen.length > 0 && (
              <button type="button" className="button is-small" onClick={() => drawer.setFilter({ [name]: [] })}>
                Any {label}
              </button>
            )}
          </Popover.Popup>
        </Popover.Positioner>
      </Popover.Portal>
    </Popover.Root>
  );
}

/** The range that a click on the axis set, with the way back. */
export function RangeChip({ quantity }: { readonly quantity: "resistance" | "capacitance" | "inductance" }) {
  const drawer = useDrawer();
  const { valueFrom, valueTo } = useDrawerState((s) => s.filter);
  if (valueFrom === null || valueTo === null) return null;
  return (
    <button type="button" className="chip" onClick={() => drawer.setFilter({ valueFrom: null, valueTo: null })} title="Show every value again">
      {formatValue(valueFrom, quantity)} to {formatValue(valueTo, quantity)} <span aria-hidden="true">×</span>
      <span className="visually-hidden">: show every value again</span>
    </button>
  );
}
