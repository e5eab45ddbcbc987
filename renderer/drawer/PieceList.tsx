import { useRef, useState, type FormEvent } from "react";
import { QUANTITY_OF } from "../../core/drawer/check-line.ts";
import { nextMark } from "../../core/drawer/piece-mark.ts";
import type { StockLine, StockPiece } from "../../core/drawer/stock.ts";
import { formatValue } from "../../core/units.ts";
import { readPositive } from "../editor/part-text.ts";
import { reasonOf } from "./drawer-store.ts";
import { useDrawer } from "./hooks.ts";
import { percentText } from "./line-text.ts";
import { TableHead } from "./TableHead.tsx";

/** The pieces of a line that the user's meter has seen; a value and Enter adds the next. */
export function PieceList({ line, pieces }: { readonly line: StockLine; readonly pieces: readonly StockPiece[] }) {
  const drawer = useDrawer();
  const quantity = QUANTITY_OF[line.kind];
  const [mark, setMark] = useState<string | null>(null);
  const [text, setText] = useState("");
  const [frequency, setFrequency] = useState(quantity === "resistance" ? "" : "1k");
  const [problem, setProblem] = useState<string | null>(null);
  const field = useRef<HTMLInputElement>(null);
  if (quantity === null) return <p className="quiet">Op amps are not measured piece by piece.</p>;

  const add = async (event: FormEvent): Promise<void> => {
    event.preventDefault();
    const value = readPositive(text, quantity);
    const hertz = frequency.trim() === "" ? null : readPositive(frequency, "frequency");
    if (!value.ok) setProblem(value.message);
    else if (hertz !== null && !hertz.ok) setProblem(`frequency: ${hertz.message}`);
    else {
      try {
        await drawer.putPieces([{ id: null, line: line.id, mark: (mark ?? nextMark(pieces)).trim(), value: value.value, frequency: hertz?.value ?? null }]);
        setText("");
        setMark(null);
        setProblem(null);
        field.current?.focus();
      } catch (error) {
        setProblem(reasonOf(error));
      }
    }
  };
  const remove = (piece: StockPiece): void => {
    drawer.removePieces([piece.id]).catch((error: unknown) => setProblem(reasonOf(error)));
  };

  return (
    <>
      <form className="piece-form" onSubmit={(event) => void add(event)}>
        <input className="text-input is-small" aria-label="Mark of the piece" value={mark ?? nextMark(pieces)} onChange={(event) => setMark(event.target.value)} />
        <input ref={field} className="text-input is-small" aria-label="Measured value" placeholder="measured value" autoComplete="off" value={text} onChange={(event) => setText(event.target.value)} />
        <input className="text-input is-small" aria-label="Measured at" placeholder="DC" value={frequency} onChange={(event) => setFrequency(event.target.value)} />
        <button type="submit" className="button is-small is-primary">
          Add
        </button>
      </form>
      {problem !== null && (
        <p className="field-error" role="alert">
          {problem}
        </p>
      )}
      {pieces.length === 0 ? (
        <p className="quiet">Write a number on each piece, measure it, and keep the values here: they can then be matched to a board.</p>
      ) : (
        <table className="list-table">
          <TableHead columns={["mark", { figure: "measured" }, { figure: "off" }, { figure: "at" }, { unseen: "remove" }]} />
          <tbody>
            {pieces.map((piece) => (
              <tr key={piece.id}>
                <td>{piece.mark}</td>
                <td className="is-number">{formatValue(piece.value, quantity, { significant: 5 })}</td>
                <td className="is-number">{line.value === null ? "" : percentText(piece.value / line.value - 1)}</td>
                <td className="is-number">{piece.frequency === null ? "DC" : formatValue(piece.frequency, "frequency")}</td>
                <td className="is-number">
                  <button type="button" className="drop" aria-label={`Remove piece ${piece.mark}`} title={`Remove piece ${piece.mark}`} onClick={() => remove(piece)}>
                    ×
                  </button>
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      )}
    </>
  );
}
