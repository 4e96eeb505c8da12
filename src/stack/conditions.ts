import type { Condition } from "./acquisition.ts";
import { readQuantity } from "./quantity.ts";
import type { SettingText } from "./settings.ts";

/** A condition to compare by: a number, a quantity with any unit that is one word, or else plain text. */
export function readCondition(written: SettingText): Condition {
  if (typeof written === "number") return { text: String(written), value: written, u: 0, unit: null };
  if (typeof written !== "string") return { text: written.join(", "), value: null, u: 0, unit: null };
  const quantity = readQuantity(written);
  const text = written.trim();
  if (quantity === null || !/^[\p{L}%°/Å]*/u.test(quantity.unit))
    return { text, value: null, u: 0, unit: null };
  const { value, u, unit, uncertaintyUnit } = quantity;
  if (uncertaintyUnit !== null && uncertaintyUnit !== unit && uncertaintyUnit !== "%") {
    return { text, value: null, u: 0, unit: null };
  }
  const relative = uncertaintyUnit === "%" && unit !== "%";
  return {
    text,
    value,
    u: relative ? ((u ?? 0) / 100) * Math.abs(value) : (u ?? 0),
    unit: unit === "" ? null : unit,
  };
}
