declare const unit: unique symbol;

/**
 * Two lengths that must not be mixed up. A pixel is a CSS pixel inside the sheet's element. A sheet unit is the length in
 * which files keep places: it is tied to the frequency ruling and to no screen.
 */
export type Pixel = number & { readonly [unit]: "pixel" };
export type SheetUnit = number & { readonly [unit]: "sheet unit" };

/** Names a plain number as pixels; the one way in. */
export const px = (value: number): Pixel => value as Pixel;
/** Names a plain number as sheet units; the one way in. */
export const sheetUnits = (value: number): SheetUnit => value as SheetUnit;

export interface ScreenPoint {
  readonly x: Pixel;
  readonly y: Pixel;
}

/** A place as files keep it. */
export interface SheetPlace {
  readonly x: SheetUnit;
  readonly y: SheetUnit;
}

/** In pixels. */
export interface Box {
  readonly left: number;
  readonly top: number;
  readonly right: number;
  readonly bottom: number;
}

export function isInside(box: Box, x: number, y: number): boolean {
  return x >= box.left && x <= box.right && y >= box.top && y <= box.bottom;
}

/** Whether two boxes share an area; touching sides do not count. */
export function overlaps(a: Box, b: Box): boolean {
  return a.left < b.right && b.left < a.right && a.top < b.bottom && b.top < a.bottom;
}

export function clamp(value: number, least: number, most: number): number {
  return Math.max(least, Math.min(most, value));
}
