// Number to text: the only place.
const grouped = new Intl.NumberFormat("en", { maximumFractionDigits: 0 });

export const count = (n: number): string => grouped.format(n);

/** A share: whole from 10 %, one decimal from 1 %, two below. */
export function percent(x: number): string {
  const p = 100 * x;
  if (p >= 9.95) return `${p.toFixed(0)} %`;
  if (p >= 0.995) return `${p.toFixed(1)} %`;
  if (p === 0) return "0 %";
  return p < 0.005 ? "< 0.01 %" : `${p.toFixed(2)} %`;
}

/** Three significant digits; the sign of infinity for what is absent because infinite. */
export function number(x: number | null | undefined, absent = "∞"): string {
  if (x === null || x === undefined) return absent;
  if (x === 0) return "0";
  const a = Math.abs(x);
  if (a >= 1e6 || a < 1e-3) {
    const [m, e] = x.toExponential(2).split("e") as [string, string];
    return `${m.replace("-", "−")} × 10^${e.replace("+", "").replace("-", "−")}`;
  }
  if (a >= 1000) return count(x);
  return x.toPrecision(3).replace(/\.?0+$/, (z) => (z.startsWith(".") ? "" : z)).replace("-", "−");
}

/** A field's value as it is typed: no grouping, no more digits than the step asks for. */
export function typed(x: number, step: number): string {
  const digits = Math.max(0, Math.min(6, Math.ceil(-Math.log10(step) - 1e-9)));
  const short = Number(x.toFixed(digits));
  return String(Math.abs(short - x) < 1e-12 * Math.max(1, Math.abs(x)) ? short : Number(x.toPrecision(7)));
}

export function seconds(s: number): string {
  if (s < 1) return "1 s";
  if (s < 90) return `${Math.round(s)} s`;
  return `${Math.round(s / 60)} min`;
}

export function range(r: { low: number | null; high: number | null }, absentHigh = "no upper end"): string {
  return `${number(r.low, "0")} to ${number(r.high, absentHigh)}`;
}
