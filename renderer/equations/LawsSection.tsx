import { memo } from "react";
import type { LawModel } from "./block-model.ts";
import { Tex } from "./Tex.tsx";

/** Design laws: with symbols, with this board's values put in, the result, and what each part does to it. */
export function LawsSection({ laws }: { readonly laws: readonly LawModel[] }) {
  return (
    <section className="equations-section" aria-label="Design laws">
      <h3>Design laws</h3>
      <p className="hint">The band alone on paper: an ideal op amp, no neighbours, no track.</p>
      <div className="law-list">
        {laws.map((law) => (
          <LawCard key={law.symbol} law={law} />
        ))}
      </div>
    </section>
  );
}

const LawCard = memo(function LawCard({ law }: { readonly law: LawModel }) {
  return (
    <div className="law-card" role="group" aria-label={law.label} data-law={law.symbol}>
      <header>
        <h4>{law.label}</h4>
        <strong data-testid="law-result">{law.result}</strong>
      </header>
      <div className="law-body">
        <div className="law-tex">
          <Tex tex={law.tex} />
        </div>
        <table className="law-moves">
          <caption>
            1 % more moves <Tex tex={law.symbolTex} /> by
          </caption>
          <tbody>
            {law.moves.map(({ part, symbol, percent }) => (
              <tr key={symbol}>
                <th scope="row">{part}</th>
                <td>{percent}</td>
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </div>
  );
}, isSameLaw);

/** Laws are made anew with every board; most stay what they were. */
function isSameLaw(a: { readonly law: LawModel }, b: { readonly law: LawModel }): boolean {
  return a.law.tex === b.law.tex && a.law.result === b.law.result && a.law.moves.every((move, index) => move.percent === b.law.moves[index]?.percent && move.part === b.law.moves[index].part);
}
