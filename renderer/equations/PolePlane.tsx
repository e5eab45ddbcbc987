import { useMemo, useRef, useState, type KeyboardEvent } from "react";
import { formatValue } from "../../core/units.ts";
import { useSize } from "../sheet/use-surroundings.ts";
import { planeOf, type Plane, type PlaneMark } from "./plane-model.ts";
import { rootText, type RootRow } from "./roots-model.ts";

interface PolePlaneProps {
  readonly rows: readonly RootRow[];
  /** The block whose poles stand out. */
  readonly selected: readonly string[];
  readonly nameOf: (id: string) => string;
  readonly onPick: (row: RootRow) => void;
}

const HEIGHT = 320;

/** Poles as crosses and zeros as rings in the unrolled s-plane; arrows walk from root to root. */
export function PolePlane({ rows, selected, nameOf, onPick }: PolePlaneProps) {
  const frame = useRef<HTMLDivElement>(null);
  const width = useSize(frame)?.width ?? 0;
  const plane = useMemo(() => (width > 200 && rows.some((row) => row.frequency > 0) ? planeOf(rows, width, HEIGHT) : null), [rows, width]);
  const [walked, setWalked] = useState<string | null>(null);
  const [active, setActive] = useState<string | null>(null);
  const stop = plane?.marks.find(({ row }) => row.key === walked) ?? plane?.marks[0];
  const shown = plane?.marks.find(({ row }) => row.key === active);
  const onKeyDown = (event: KeyboardEvent<SVGSVGElement>): void => {
    if (!plane || !stop) return;
    const at = plane.marks.indexOf(stop);
    const to = { ArrowRight: at + 1, ArrowUp: at + 1, ArrowLeft: at - 1, ArrowDown: at - 1, Home: 0, End: plane.marks.length - 1 }[event.key];
    if (event.key === "Enter" || event.key === " ") onPick(stop.row);
    else if (to === undefined) return;
    else {
      const next = plane.marks[Math.max(0, Math.min(plane.marks.length - 1, to))];
      setWalked(next.row.key);
      event.currentTarget.querySelector<SVGGElement>(`[data-root="${next.row.key}"]`)?.focus();
    }
    event.preventDefault();
  };
  return (
    <div className="plane is-circuit-picture" ref={frame}>
      {plane && (
        <svg width={plane.width} height={plane.height} role="group" aria-label="Poles and zeros in the s-plane, by frequency and damping" onKeyDown={onKeyDown}>
          <Ruling plane={plane} />
          {plane.marks.map((mark) => (
            <Mark
              key={mark.row.key}
              mark={mark}
              isSelected={mark.row.block !== null && selected.includes(mark.row.block)}
              isStop={mark === stop}
              text={`${mark.count > 1 ? `${mark.count} times: ` : ""}${rootText(mark.row, nameOf)}`}
              onActive={(isActive) => setActive(isActive ? mark.row.key : null)}
              onPick={() => onPick(mark.row)}
            />
          ))}
        </svg>
      )}
      {plane && shown && (
        <p className="plane-tip" style={{ left: Math.min(shown.x, plane.width - 130), top: shown.y }} data-below={shown.y < 60 || undefined} aria-hidden="true">
          {shown.count > 1 && `${shown.count} × `}
          {rootText(shown.row, nameOf)}
        </p>
      )}
    </div>
  );
}

function Ruling({ plane }: { readonly plane: Plane }) {
  const { left, right, top, bottom, edgeY, originX, decades, levels } = plane;
  const step = decades.length > 9 && right - left < 640 ? 2 : 1;
  return (
    <g aria-hidden="true">
      <defs>
        <pattern id="plane-hatch" width="9" height="9" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">
          <path d="M0 0V9" className="plane-hatch" />
        </pattern>
      </defs>
      <rect x={left} y={top} width={right - left} height={edgeY - top} fill="url(#plane-hatch)" />
      {decades.map(({ x, frequency }, index) => (
        <g key={frequency}>
          <path d={`M${x} ${top}V${bottom + 16}`} className="plane-rule" />
          {index % step === 0 && (
            <text x={x} y={bottom + 30} textAnchor="middle">
              {formatValue(frequency, "frequency", { significant: 1 }).replace(/ ?Hz$/, "")}
            </text>
          )}
        </g>
      ))}
      {levels.map(({ y, label, note }) => (
        <g key={label}>
          <path d={`M${left} ${y}H${right}`} className="plane-rule" />
          <text x={left - 8} y={y + 4} textAnchor="end">
            {note === "" ? label : `${label} · ${note}`}
          </text>
        </g>
      ))}
      <path d={`M${left} ${edgeY}H${right}`} className="plane-edge" />
      <text x={right - 8} y={edgeY - top > 40 ? top + 18 : edgeY - 6} textAnchor="end" className="plane-note">
        right half plane: a pole here oscillates
      </text>
      {originX !== null && (
        <text x={originX} y={bottom + 30} textAnchor="middle">
          0
        </text>
      )}
      <text x={(left + right) / 2} y={bottom + 49} textAnchor="middle">
        distance from the origin, |s|/2π, Hz
      </text>
    </g>
  );
}

interface MarkProps {
  readonly mark: PlaneMark;
  readonly isSelected: boolean;
  readonly isStop: boolean;
  readonly text: string;
  readonly onActive: (isActive: boolean) => void;
  readonly onPick: () => void;
}

function Mark({ mark, isSelected, isStop, text, onActive, onPick }: MarkProps) {
  const { row, x, y, count } = mark;
  const kinds = ["plane-mark", `is-${row.kind}`, isSelected ? "is-selected" : "", row.isUnstable ? "is-unstable" : ""];
  return (
    <g
      className={kinds.filter((kind) => kind !== "").join(" ")}
      role="button"
      tabIndex={isStop ? 0 : -1}
      data-root={row.key}
      aria-label={text}
      transform={`translate(${x} ${y})`}
      onPointerEnter={() => onActive(true)}
      onPointerLeave={() => onActive(false)}
      onFocus={() => onActive(true)}
      onBlur={() => onActive(false)}
      onClick={onPick}
    >
      <circle r="12" className="plane-target" />
      {isSelected && <circle r="9.5" className="plane-ring" />}
      {row.kind === "pole" ? <path d="M-4.5-4.5 4.5 4.5M4.5-4.5-4.5 4.5" /> : <circle r="4.8" />}
      {count > 1 && (
        <text x="7" y="-7">
          ×{count}
        </text>
      )}
    </g>
  );
}
