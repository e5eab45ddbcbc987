import { memo } from "react";
import type { BandFigures, BandPeak } from "../../core/analysis/bands.ts";
import { BLOCKS } from "../../core/blocks/index.ts";
import { formatDb, formatFigure } from "../../core/units.ts";
import { WarningSign } from "../panels/Stability.tsx";
import { useUnstableEnds } from "../worker/hooks.ts";

const NONE = "–";
const hertz = (value: number | null): string => (value === null ? NONE : formatFigure(value, "frequency"));
/** A Q this low is no peak any more, and its digits say nothing. */
const plain = (value: number | null): string => (value === null ? NONE : value < 0.01 ? "< 0.01" : formatFigure(value, "plain"));

interface Row {
  readonly label: string;
  readonly cell: (peak: BandPeak, isolated: number) => string;
  readonly isKey?: boolean;
}

const RESONANCE: readonly Row[] = [
  { label: "isolated", cell: (_peak, isolated) => formatDb(isolated) },
  { label: "lost in circuit", cell: (peak, isolated) => formatDb(peak.peak - isolated) },
  { label: "peak", cell: (peak) => formatDb(peak.peak), isKey: true },
  { label: "centre", cell: (peak) => hertz(peak.frequency), isKey: true },
  { label: "Q", cell: (peak) => plain(peak.q), isKey: true },
  { label: "lower −3 dB", cell: (peak) => hertz(peak.lower) },
  { label: "upper −3 dB", cell: (peak) => hertz(peak.upper) },
];

const SHELF: readonly Row[] = [
  ...RESONANCE.slice(0, 2),
  { label: "plateau", cell: (peak) => formatDb(peak.peak), isKey: true },
  { label: "half-gain corner", cell: (peak) => hertz(peak.frequency), isKey: true },
];

const LEVEL: readonly Row[] = SHELF.slice(0, 3);

function rowsFor(figures: BandFigures): readonly Row[] {
  const { shape } = BLOCKS[figures.kind];
  return shape === "resonance" ? RESONANCE : shape === "level" ? LEVEL : SHELF;
}

/** What a band does in circuit, both ends of its slider, and its leg alone. */
export const FiguresSection = memo(function FiguresSection({ figures }: { readonly figures: BandFigures }) {
  const leg = [
    ["L", figures.inductance === null ? null : formatFigure(figures.inductance, "inductance")],
    ["f₀", figures.resonance === null ? null : formatFigure(figures.resonance, "frequency")],
    ["Q", figures.legQ === null ? null : formatFigure(figures.legQ, "plain")],
  ].filter((entry) => entry[1] !== null);
  const ends = useUnstableEnds().filter(({ id }) => id === figures.id).map(({ end }) => end);
  const mark = (end: "boost" | "cut"): string | undefined => (ends.includes(end) ? "is-void" : undefined);
  return (
    <section className="panel-section" aria-label="In circuit">
      <h3>In circuit, others centred</h3>
      {ends.length > 0 && (
        <p className="void-note">
          <WarningSign /> Unstable at full {ends.join(" and full ")}: what is struck means nothing.
        </p>
      )}
      <table className="figure-table is-circuit-figure">
        <thead>
          <tr>
            <th scope="col">
              <span className="visually-hidden">Figure</span>
            </th>
            <th scope="col" className="is-boost">
              ▲ boost
            </th>
            <th scope="col" className="is-cut">
              ▼ cut
            </th>
          </tr>
        </thead>
        <tbody>
          {rowsFor(figures).map((row) => (
            <tr key={row.label} className={row.isKey ? "is-key" : undefined} data-figure={row.label}>
              <th scope="row">{row.label}</th>
              <td className={mark("boost")}>{row.cell(figures.boost, figures.isolatedBoost)}</td>
              <td className={mark("cut")}>{row.cell(figures.cut, -figures.isolatedBoost)}</td>
            </tr>
          ))}
        </tbody>
      </table>
      {leg.length > 0 && (
        <p className="hint" data-testid="leg">
          Leg alone: {leg.map(([name, text]) => `${name} ${text}`).join(" · ")}
        </p>
      )}
    </section>
  );
});
