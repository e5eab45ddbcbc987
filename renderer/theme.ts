import { cssName, INKS, type Inks, type Theme } from "./sheet/tokens.ts";

/** Shows a theme: hands the sheet's inks to the style sheets as custom properties. */
export function applyTheme(theme: Theme): void {
  const root = document.documentElement;
  root.dataset.theme = theme;
  for (const [ink, colour] of Object.entries(INKS[theme])) root.style.setProperty(cssName(ink as keyof Inks), colour);
}
