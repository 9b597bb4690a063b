// The settings a controller takes: whole multiples of its resolution between its limits, in exact decimals.
import { compare, readDecimal, type Decimal } from "./decimal.ts";
import type { Setting } from "./types.ts";

/** What the controller takes; null where it sets no bound. */
export interface Grid {
  readonly step: Decimal | null;
  readonly minimum: Decimal | null;
  readonly maximum: Decimal | null;
}

/** The grid as typed; what cannot be read bounds nothing. */
export function gridOf({ step, minimum, maximum }: Pick<Setting, "step" | "minimum" | "maximum">): Grid {
  const read = readDecimal(step);
  return { step: read && read.digits > 0n ? read : null, minimum: readDecimal(minimum), maximum: readDecimal(maximum) };
}

/** The setting of the grid nearest to a number. */
export function onGrid(grid: Grid, setting: Decimal): Decimal {
  if (!grid.step) return limited(grid, setting);
  const { whole, unit } = counted(setting, grid.step);
  // Half a step up, then down to a whole one.
  return limited(grid, multiple(grid.step, floorDivide(2n * whole + unit, 2n * unit)));
}

/** The setting of the grid so many steps away; from between two settings the first step goes to the next one. */
export function stepOnGrid(grid: Grid, setting: Decimal, steps: number): Decimal | null {
  if (!grid.step) return null;
  const { whole, unit } = counted(setting, grid.step);
  const start = steps > 0 ? floorDivide(whole, unit) : -floorDivide(-whole, unit);
  return limited(grid, multiple(grid.step, start + BigInt(steps)));
}

/** Setting and step as whole numbers of the same unit. */
function counted(setting: Decimal, step: Decimal): { whole: bigint; unit: bigint } {
  const exponent = Math.min(setting.exponent, step.exponent);
  const lift = ({ digits, exponent: own }: Decimal): bigint => digits * 10n ** BigInt(own - exponent);
  return { whole: lift(setting), unit: lift(step) };
}

function multiple(step: Decimal, count: bigint): Decimal {
  // Reading it back takes superfluous zeros away.
  return readDecimal(`${step.digits * count}e${step.exponent}`) ?? { digits: 0n, exponent: 0 };
}

/** Within the limits, on the grid's own settings: the first multiple that is not below, the last that is not above. */
function limited(grid: Grid, setting: Decimal): Decimal {
  const { step, minimum, maximum } = grid;
  const inward = (end: Decimal, up: boolean): Decimal => {
    if (!step) return end;
    const { whole, unit } = counted(end, step);
    return multiple(step, up ? -floorDivide(-whole, unit) : floorDivide(whole, unit));
  };
  if (minimum && compare(setting, minimum) < 0) return inward(minimum, true);
  if (maximum && compare(setting, maximum) > 0) return inward(maximum, false);
  return setting;
}

function floorDivide(value: bigint, by: bigint): bigint {
  const quotient = value / by;
  return value % by < 0n ? quotient - 1n : quotient;
}
