/** The inks of the sheet in both themes. The style sheets of the screens carry the same colours under the same names. */
export interface Inks {
  readonly paper: string;
  readonly card: string;
  readonly sunken: string;
  readonly ink: string;
  readonly inkSoft: string;
  readonly rule: string;
  readonly ruleStrong: string;
  readonly accent: string;
  readonly accentWash: string;
  readonly onAccent: string;
  /** Fills and lines above the centre; `boostText` keeps 4.5:1 as text. */
  readonly boost: string;
  readonly boostText: string;
  readonly cut: string;
  readonly cutText: string;
  readonly warning: string;
}

export type Theme = "paper" | "night";

export const INKS: Readonly<Record<Theme, Inks>> = {
  paper: {
    paper: "#faf6ec", card: "#fffdf7", sunken: "#f3edde", ink: "#22303c", inkSoft: "#56616b", rule: "#e4dac4", ruleStrong: "#a89d84",
    accent: "#0f766e", accentWash: "#e0ece6", onAccent: "#ffffff", boost: "#b7791f", boostText: "#85540f", cut: "#3b5b92", cutText: "#3b5b92", warning: "#b4432b",
  },
  night: {
    paper: "#14181d", card: "#1b2128", sunken: "#101317", ink: "#e8e2d2", inkSoft: "#a7aeb3", rule: "#2b333b", ruleStrong: "#6d7780",
    accent: "#56b8ad", accentWash: "#1c3432", onAccent: "#0c1413", boost: "#d9a24a", boostText: "#e0b062", cut: "#8ca9dc", cutText: "#9db6e4", warning: "#e88d7d",
  },
};

/** Name of an ink as a custom property: `inkSoft` is `--ink-soft`. */
export function cssName(ink: keyof Inks): string {
  return `--${ink.replaceAll(/[A-Z]/g, (letter) => `-${letter.toLowerCase()}`)}`;
}

export const FONT = '"IBM Plex Sans", "Segoe UI", system-ui, sans-serif';
