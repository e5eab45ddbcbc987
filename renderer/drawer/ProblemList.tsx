import type { BoardRole } from "../../core/drawer/roles.ts";
import type { StockedLine } from "../../core/drawer/stock.ts";
import { needsRatingCaution, RATING_CAUTION, type Problem } from "../../core/drawer/stress.ts";

interface Found {
  readonly role: BoardRole;
  readonly line: StockedLine;
  readonly problem: Problem;
}

/** The sign before a problem: it bars, it is to be weighed, or it is only said. */
export function problemMark({ level }: Problem): string {
  return level === "fault" ? "✕" : level === "caution" ? "⚠" : "·";
}

/** What is to be said of lines in their places; what is said of several places alike is said once. */
export function ProblemList({ found }: { readonly found: readonly Found[] }) {
  const said = new Map<string, Found[]>();
  for (const one of found) {
    const key = `${one.line.id} ${one.problem.message}`;
    said.set(key, [...(said.get(key) ?? []), one]);
  }
  return (
    <>
      <ul className="report-list is-caution">
        {[...said].map(([key, places]) => (
          <li key={key}>
            {problemMark(places[0].problem)} <strong>{places.map(({ role }) => role.label).join("; ")}</strong>, {places[0].line.id}: {places[0].problem.message}
          </li>
        ))}
      </ul>
      {needsRatingCaution(found.map(({ problem }) => problem)) && <p className="caution">{RATING_CAUTION}</p>}
    </>
  );
}
