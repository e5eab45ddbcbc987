/** Columns that a solver fills, one entry a frequency: H = v(load)/EMF and, where asked for, its slope dH/ds in seconds. */
export interface TransferColumns {
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly slopeRe?: Float64Array;
  readonly slopeIm?: Float64Array;
}

/** Whether the slope is asked for. */
export function hasSlopes(columns: TransferColumns): columns is Required<TransferColumns> {
  return columns.slopeRe !== undefined && columns.slopeIm !== undefined;
}

export function transferColumns(points: number, withSlope: boolean): TransferColumns {
  const columns = { re: new Float64Array(points), im: new Float64Array(points) };
  return withSlope ? { ...columns, slopeRe: new Float64Array(points), slopeIm: new Float64Array(points) } : columns;
}
