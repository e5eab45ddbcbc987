/** Texts that a spreadsheet would take for a formula, guarded ones too. */
const FORMULA = /^'*[=+\-@]./s;
const GUARDED = /^'+[=+\-@]./s;

/** A text as a table holds it: one that a spreadsheet would take for a formula gets an apostrophe before it, which keeps it a text. */
export function guardFormula(text: string): string {
  return FORMULA.test(text) ? `'${text}` : text;
}

/** A guarded text as it was. */
export function unguardFormula(text: string): string {
  return GUARDED.test(text) ? text.slice(1) : text;
}
