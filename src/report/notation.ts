const SUPERSCRIPT: Readonly<Record<string, string>> = {
  "-": "⁻",
  "0": "⁰",
  "1": "¹",
  "2": "²",
  "3": "³",
  "4": "⁴",
  "5": "⁵",
  "6": "⁶",
  "7": "⁷",
  "8": "⁸",
  "9": "⁹",
};

/** "×10⁻⁴"; empty for an exponent of 0. */
export function powerOfTen(exponent: number): string {
  return exponent === 0 ? "" : `×10${superscript(String(exponent))}`;
}

/** Sets digits and minus signs as superscripts. */
export function superscript(text: string): string {
  return text.replace(/[-0-9]/g, (character) => SUPERSCRIPT[character] ?? character);
}

/**
 * A value with its standard uncertainty in concise notation: 0.512(34), 12.3(1.2), 5.123(34)×10⁴.
 *
 * JCGM 100:2008 (GUM), 7.2.2: the number in parentheses is the standard uncertainty referred to the last digits of
 * the value (its form 2), or, where those digits straddle the decimal point, in the unit of the value (its form 3).
 * The uncertainty has two significant digits (7.2.6). Powers of ten are used where the plain number would be below
 * 0.001, from 10⁵ up, or would need zeros that carry no information.
 *
 * @param u standard uncertainty, ≥ 0; 0 gives the value alone, to six significant digits
 * @throws RangeError for a value or u that is not finite, or a negative u
 */
export function concise(value: number, u: number): string {
  requireFinite(value);
  requireFinite(u);
  if (u < 0) throw new RangeError(`a standard uncertainty cannot be negative, but is ${u}`);
  if (u === 0) return plain(value);
  const rounded = Number(u.toExponential(1));
  const lastPlace = Math.floor(Math.log10(rounded) + 1e-12) - 1;
  const exponent = commonExponent(Math.max(Math.abs(value), rounded), lastPlace);
  const decimals = exponent - lastPlace;
  const mantissa = signed((value / 10 ** exponent).toFixed(decimals));
  return `${mantissa}(${uncertaintyDigits(rounded, lastPlace, decimals)})${powerOfTen(exponent)}`;
}

function commonExponent(size: number, lastPlace: number): number {
  const magnitude = Math.floor(Math.log10(size));
  return magnitude < -3 || magnitude >= 5 || lastPlace > 0 ? magnitude : 0;
}

function uncertaintyDigits(u: number, lastPlace: number, decimals: number): string {
  const digits = Math.round(u / 10 ** lastPlace);
  const straddles = decimals === 1;
  return straddles ? (digits / 10).toFixed(1) : String(digits);
}

/** The two ends of an interval, to the decimal place that u's two digits give: "0.445 to 0.579". */
export function between(low: number, high: number, u: number): string {
  requireFinite(low);
  requireFinite(high);
  const width = u > 0 ? u : (high - low) / 4;
  if (!(width > 0)) return `${plain(low)} to ${plain(high)}`;
  const lastPlace = Math.floor(Math.log10(Number(width.toExponential(1))) + 1e-12) - 1;
  const exponent = commonExponent(Math.max(Math.abs(low), Math.abs(high), width), lastPlace);
  const end = (value: number) => signed((value / 10 ** exponent).toFixed(exponent - lastPlace));
  return exponent === 0
    ? `${end(low)} to ${end(high)}`
    : `(${end(low)} to ${end(high)})${powerOfTen(exponent)}`;
}

/** An upper limit, two significant digits, rounded up so that the limit still holds: "< 0.21". */
export function upperLimit(value: number): string {
  requireFinite(value);
  if (value <= 0) return `< ${plain(value)}`;
  const place = Math.floor(Math.log10(value)) - 1;
  // 1e-9 keeps 0.21 from becoming 0.22 through its binary rounding
  const digits = Math.ceil(value / 10 ** place - 1e-9);
  return `< ${plain(Number(`${digits}e${place}`))}`;
}

/** A number without a stated uncertainty, to at most `digits` significant digits. */
export function plain(value: number, digits = 6): string {
  requireFinite(value);
  if (value === 0) return "0";
  const rounded = Number(value.toPrecision(digits));
  const magnitude = Math.floor(Math.log10(Math.abs(rounded)));
  if (magnitude >= -3 && magnitude < 6) return signed(String(rounded));
  const mantissa = Number((rounded / 10 ** magnitude).toPrecision(digits));
  return `${signed(String(mantissa))}${powerOfTen(magnitude)}`;
}

const SYMBOL: Readonly<Record<string, string>> = {
  alpha: "α",
  beta: "β",
  gamma: "Γ",
  tau: "τ",
  tau_1: "τ₁",
  tau_2: "τ₂",
  k_n0: "kn₀",
  intercept: "Σ₀",
  amplitude: "A",
  share_1: "f",
};

/** A formula or a parameter's name as printed: tau_1 becomes τ₁, t^alpha becomes t^α, a hyphen becomes a minus. */
export function symbols(text: string): string {
  return text
    .replace(/[A-Za-z]\w*/g, (word) => (Object.hasOwn(SYMBOL, word) ? (SYMBOL[word] ?? word) : word))
    .replace(/\^([-\d]+)/g, (_, power: string) => superscript(power))
    .replaceAll("-", "−");
}

/** A real minus sign, and no minus before a zero. */
function signed(text: string): string {
  const isZero = /^-0(\.0*)?$/.test(text);
  return isZero ? text.slice(1) : text.replace("-", "−");
}

function requireFinite(value: number): void {
  if (!Number.isFinite(value)) throw new RangeError(`a number to print is not finite: ${value}`);
}
