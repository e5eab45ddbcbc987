/** Texts that a spreadsheet would take for a formula, guarded ones too: some drop white space before it. */
const FORMULA = /^'*(?:[\t\r]|\s*[=+\-@])./s;
const GUARDED = /^'+(?:[\t\r]|\s*[=+\-@])./s;

/** A text as a table holds it: one that a spreadsheet would take for a formula gets an apostrophe before it, which keeps it a text. */
export function guardFormula(text: string): string {
  return FORMULA.test(text) ? `'${text}` : text;
}

/** A guarded text as it was. */
export function unguardFormula(text: string): string {
  return GUARDED.test(text) ? text.slice(1) : text;
}
