import { useId, useMemo, useRef, useState, type KeyboardEvent, type PointerEvent } from "react";
import { QUANTITY_OF } from "../../core/drawer/check-line.ts";
import { formatCode, formatValue } from "../../core/units.ts";
import { useSize } from "../sheet/use-surroundings.ts";
import type { AxisKind } from "./drawer-store.ts";
import { RangeChip } from "./FilterBar.tsx";
import { useDrawer, useDrawerState } from "./hooks.ts";
import { counted, KIND_NAMES } from "./line-text.ts";
import { axisOf, axisText, neighbourhood, placeOn, type Axis, type AxisMark } from "./value-axis.ts";

const KINDS: readonly AxisKind[] = ["resistor", "capacitor", "inductor"];
const HEIGHT = 112;
const BASE = 74;
const SIDE = 30;

/** What one owns across the decades, and where the gaps are: bars by quantity, gaps of E12 and E24 marked by shape. */
export function ValueAxis() {
  const drawer = useDrawer();
  const kind = useDrawerState((s) => s.axisKind);
  const values = useDrawerState((s) => s.values);
  const quantity = QUANTITY_OF[kind];
  const axis = useMemo(() => axisOf(values, quantity), [values, quantity]);
  return (
    <section className="value-axis" aria-label="Values in the drawer">
      <div className="value-axis-head">
        <div className="seg is-small" role="radiogroup" aria-label="Values of">
          {KINDS.map((one) => (
            <label key={one}>
              <input type="radio" name="axis-kind" checked={one === kind} onChange={() => drawer.setAxisKind(one)} />
              {KIND_NAMES[one].many}
            </label>
          ))}
        </div>
        <RangeChip quantity={quantity} />
        <Legend />
      </div>
      <AxisDrawing axis={axis} kind={kind} />
    </section>
  );
}

function Legend() {
  return (
    <p className="value-axis-legend">
      <Sign series={12} isOwned /> E12
      <Sign series={24} isOwned /> E24
      <Sign series={null} isOwned /> other
      <span className="quiet">hollow: none there</span>
    </p>
  );
}

function Sign({ series, isOwned }: { readonly series: AxisMark["series"]; readonly isOwned: boolean }) {
  return (
    <svg width="12" height="12" viewBox="-6 -6 12 12" aria-hidden="true">
      <path d={SHAPES[String(series)]} className={isOwned ? "axis-sign is-owned" : "axis-sign"} />
    </svg>
  );
}

/** Round for E12, square for E24, a triangle for values of neither. */
const SHAPES: Readonly<Record<string, string>> = {
  12: "M0 -3.4A3.4 3.4 0 1 1 0 3.4A3.4 3.4 0 1 1 0 -3.4Z",
  24: "M-2.6 -2.6H2.6V2.6H-2.6Z",
  null: "M0 -3.8L3.6 2.8H-3.6Z",
};

function AxisDrawing({ axis, kind }: { readonly axis: Axis; readonly kind: AxisKind }) {
  const drawer = useDrawer();
  const { valueFrom, valueTo } = useDrawerState((s) => s.filter);
  const id = useId();
  const frame = useRef<HTMLDivElement>(null);
  const size = useSize(frame);
  const [pointed, setPointed] = useState<number | null>(null);
  const [inHand, setInHand] = useState(0);
  const width = size?.width ?? 900;
  const quantity = QUANTITY_OF[kind];
  const x = (value: number): number => SIDE + placeOn(axis, value) * (width - 2 * SIDE);
  const { marks } = axis;
  const current = Math.min(inHand, Math.max(0, marks.length - 1));
  const shown = pointed ?? current;
  const mark = marks[shown];

  const nearest = (event: PointerEvent): number => {
    const at = event.clientX - event.currentTarget.getBoundingClientRect().left;
    let best = 0;
    for (let i = 1; i < marks.length; i++) if (Math.abs(x(marks[i].value) - at) < Math.abs(x(marks[best].value) - at)) best = i;
    return best;
  };
  const filterAbout = (index: number): void => {
    if (!marks[index]) return;
    const { from, to } = neighbourhood(marks[index].value);
    drawer.setFilter({ kind: [kind], valueFrom: from, valueTo: to });
  };
  const onKeyDown = (event: KeyboardEvent): void => {
    const to: Readonly<Record<string, number>> = { ArrowRight: current + 1, ArrowUp: current + 1, ArrowLeft: current - 1, ArrowDown: current - 1, PageUp: current + 12, PageDown: current - 12, Home: 0, End: marks.length - 1 };
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    if (event.key === "Enter" || event.key === " ") filterAbout(current);
    else if (event.key === "Escape" && valueFrom !== null) drawer.setFilter({ valueFrom: null, valueTo: null });
    else if (Object.hasOwn(to, event.key)) setInHand(Math.max(0, Math.min(marks.length - 1, to[event.key])));
    else return;
    setPointed(null);
    event.preventDefault();
  };
  const height = (pieces: number): number => (pieces === 0 ? 0 : 6 + 42 * Math.sqrt(pieces / axis.most));
  return (
    <>
      <div
        ref={frame}
        className="value-axis-drawing"
        role="slider"
        tabIndex={0}
        aria-label={`Values of ${KIND_NAMES[kind].many.toLowerCase()}; Enter shows the lines about one`}
        aria-valuemin={0}
        aria-valuemax={Math.max(0, marks.length - 1)}
        aria-valuenow={current}
        aria-valuetext={marks[current] ? markText(marks[current], quantity) : "nothing"}
        aria-describedby={`${id}-text`}
        onKeyDown={onKeyDown}
        onPointerMove={(event) => setPointed(marks.length === 0 ? null : nearest(event))}
        onPointerLeave={() => setPointed(null)}
        onPointerUp={(event) => {
          if (marks.length === 0) return;
          setInHand(nearest(event));
          filterAbout(nearest(event));
        }}
      >
        <svg width={width} height={HEIGHT} aria-hidden="true">
          {valueFrom !== null && valueTo !== null && <rect x={x(Math.max(valueFrom, axis.from))} y={22} width={Math.max(2, x(Math.min(valueTo, axis.to)) - x(Math.max(valueFrom, axis.from)))} height={BASE - 20} className="axis-range" />}
          {axis.decades.map((decade) => (
            <g key={decade}>
              <path d={`M${x(decade)} 22V${BASE + 20}`} className="axis-decade" />
              <text x={x(decade)} y={HEIGHT - 6} className="axis-label" textAnchor="middle">
                {formatValue(decade, quantity)}
              </text>
            </g>
          ))}
          <path d={`M${SIDE} ${BASE}H${width - SIDE}`} className="axis-base" />
          {marks.map((one, index) => (
            <g key={one.value} transform={`translate(${x(one.value)} ${BASE - height(one.quantity)})`} className={index === shown ? "is-pointed" : undefined}>
              {one.quantity > 0 && <path d={`M0 0V${height(one.quantity)}`} className="axis-bar" />}
              <path d={SHAPES[String(one.series)]} className={one.quantity > 0 ? "axis-sign is-owned" : "axis-sign"} transform={one.quantity > 0 ? undefined : `translate(0 ${one.series === 12 ? 8 : 15}) scale(0.8)`} />
            </g>
          ))}
          {mark && <path d={`M${x(mark.value)} 18V${BASE + 4}`} className="axis-pointer" />}
        </svg>
        {!mark && (
          <p className="axis-reading quiet" style={{ left: SIDE }}>
            No {KIND_NAMES[kind].many.toLowerCase()} among the lines shown.
          </p>
        )}
        {mark && (
          <p className="axis-reading" style={{ left: Math.max(SIDE, Math.min(width - 290, x(mark.value) - 8)) }}>
            {markText(mark, quantity)}
          </p>
        )}
      </div>
      <p id={`${id}-text`} className="visually-hidden">
        {axisText(axis, KIND_NAMES[kind].many.toLowerCase(), (value) => formatCode(value, quantity, 6))}
      </p>
    </>
  );
}

function markText(mark: AxisMark, quantity: "resistance" | "capacitance" | "inductance"): string {
  const series = mark.series === null ? "no series" : `E${mark.series}`;
  const what = mark.lines === 0 ? "none in the drawer" : `${counted(mark.quantity, "piece")} in ${counted(mark.lines, "line")}`;
  return `${formatValue(mark.value, quantity, { significant: 6 })} · ${series} · ${what}`;
}
