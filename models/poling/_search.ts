// Pure: no I/O, no clock, no hidden randomness.

/**
 * Root of f between a and b, where f(a) and f(b) differ in sign (or one is 0): Brent's method (R. P. Brent, Algorithms
 * for Minimization without Derivatives, 1973, ch. 4), to `tolerance` in x.
 */
export function rootBetween(
  f: (x: number) => number,
  a: number,
  b: number,
  fa: number,
  fb: number,
  tolerance: number,
): number {
  if (fa === 0) return a;
  if (fb === 0) return b;
  // b is the best estimate, c the other end of the bracket, a the estimate before.
  let c = a;
  let fc = fa;
  let last = b - a;
  let beforeLast = last;
  for (let turn = 0; turn < 200; turn++) {
    if (Math.abs(fc) < Math.abs(fb)) [a, b, c, fa, fb, fc] = [b, c, b, fb, fc, fb];
    const half = (c - b) / 2;
    const small = 2 * Number.EPSILON * Math.abs(b) + tolerance / 2;
    if (Math.abs(half) <= small || fb === 0) return b;
    let step = half;
    let kept = half;
    if (Math.abs(beforeLast) >= small && Math.abs(fa) > Math.abs(fb)) {
      const s = fb / fa;
      let p: number;
      let q: number;
      if (a === c) {
        p = 2 * half * s;
        q = 1 - s;
      } else {
        const r = fb / fc;
        const t = fa / fc;
        p = s * (2 * half * t * (t - r) - (b - a) * (r - 1));
        q = (t - 1) * (r - 1) * (s - 1);
      }
      if (p > 0) q = -q;
      else p = -p;
      if (2 * p < Math.min(3 * half * q - Math.abs(small * q), Math.abs(beforeLast * q))) {
        step = p / q;
        kept = last;
      }
    }
    beforeLast = kept;
    last = step;
    [a, fa] = [b, fb];
    b += Math.abs(step) > small ? step : Math.sign(half) * small;
    fb = f(b);
    if ((fb > 0) === (fc > 0)) {
      [c, fc] = [a, fa];
      beforeLast = last = b - a;
    }
  }
  return b;
}

const GOLDEN = (3 - Math.sqrt(5)) / 2;

/** Least value of f between a and b, where it has one valley, by golden sections to `tolerance` in x. */
export function leastBetween(
  f: (x: number) => number,
  a: number,
  b: number,
  tolerance: number,
): { x: number; value: number } {
  let low = a;
  let high = b;
  let x1 = low + GOLDEN * (high - low);
  let x2 = high - GOLDEN * (high - low);
  let f1 = f(x1);
  let f2 = f(x2);
  for (let turn = 0; turn < 200 && high - low > tolerance; turn++) {
    if (f1 < f2) {
      [high, x2, f2] = [x2, x1, f1];
      x1 = low + GOLDEN * (high - low);
      f1 = f(x1);
    } else {
      [low, x1, f1] = [x1, x2, f2];
      x2 = high - GOLDEN * (high - low);
      f2 = f(x2);
    }
  }
  return f1 < f2 ? { x: x1, value: f1 } : { x: x2, value: f2 };
}

/** f on equal intervals of lo … hi. */
export interface Scan {
  readonly x: Float64Array;
  readonly f: Float64Array;
}

/** Samples f at intervals + 1 points. @throws RangeError if f is not finite somewhere */
export function scan(
  f: (x: number) => number,
  lo: number,
  hi: number,
  intervals: number,
  what: string,
): Scan {
  const x = new Float64Array(intervals + 1);
  const values = new Float64Array(intervals + 1);
  for (let k = 0; k <= intervals; k++) {
    x[k] = k === intervals ? hi : lo + (hi - lo) * k / intervals;
    values[k] = f(x[k]!);
    if (!Number.isFinite(values[k]!)) {
      throw new RangeError(`Cannot search ${what}: found ${values[k]} at ${x[k]}, need a finite number`);
    }
  }
  return { x, f: values };
}

/** Interior extremes of a scanned f, ascending: where it turns, and +1 for a top or −1 for a bottom. */
export function turningPoints(
  f: (x: number) => number,
  samples: Scan,
  tolerance: number,
): { x: number; value: number; side: 1 | -1 }[] {
  const { x, f: y } = samples;
  const found: { x: number; value: number; side: 1 | -1 }[] = [];
  const look = (side: 1 | -1, a: number, b: number) => {
    const least = leastBetween((t) => -side * f(t), a, b, tolerance);
    // An extreme at the edge of the whole range is no turning point.
    if (least.x - x[0]! <= 2 * tolerance || x[x.length - 1]! - least.x <= 2 * tolerance) return;
    if (found.length > 0 && least.x - found[found.length - 1]!.x <= 2 * tolerance) return;
    found.push({ x: least.x, value: -side * least.value, side });
  };
  for (let k = 0; k < x.length; k++) {
    const a = Math.max(0, k - 1);
    const b = Math.min(x.length - 1, k + 1);
    if (y[k]! >= y[a]! && y[k]! >= y[b]! && (y[k]! > y[a]! || y[k]! > y[b]!)) look(1, x[a]!, x[b]!);
    if (y[k]! <= y[a]! && y[k]! <= y[b]! && (y[k]! < y[a]! || y[k]! < y[b]!)) look(-1, x[a]!, x[b]!);
  }
  return found;
}

/**
 * All x of the scanned range with f(x) = level, ascending, for an f that is smooth on the scale of the scan: changes of
 * sign, and pairs of roots or a touching point inside an interval, found at the extremes of f.
 * @param touch |f − level| that counts as touching
 */
export function crossings(
  f: (x: number) => number,
  samples: Scan,
  level: number,
  tolerance: number,
  touch: number,
): { roots: number[]; nearest: number } {
  const g = (x: number) => f(x) - level;
  const { x, f: y } = samples;
  const at: { x: number; g: number }[] = [];
  const put = (t: number, value: number) => {
    if (at.length === 0 || t > at[at.length - 1]!.x) at.push({ x: t, g: value });
  };
  for (let k = 0; k < x.length; k++) {
    const here = y[k]! - level;
    const bottom = valleyAt(g, samples, k, level, tolerance);
    if (bottom !== null && bottom.x < x[k]!) put(bottom.x, bottom.value);
    put(x[k]!, here);
    if (bottom !== null && bottom.x > x[k]!) put(bottom.x, bottom.value);
  }
  return rootsOf(g, at, tolerance, touch);
}

/** Bottom of the valley of |g| that sample k is the lowest of, its neighbours being on the same side of 0. */
function valleyAt(
  g: (x: number) => number,
  samples: Scan,
  k: number,
  level: number,
  tolerance: number,
): { x: number; value: number } | null {
  const { x, f } = samples;
  const side = Math.sign(f[k]! - level);
  if (side === 0) return null;
  const before = k > 0 ? side * (f[k - 1]! - level) : Infinity;
  const here = side * (f[k]! - level);
  const after = k + 1 < x.length ? side * (f[k + 1]! - level) : Infinity;
  if (before <= 0 || after <= 0 || here > before || here > after) return null;
  const from = x[Math.max(0, k - 1)]!;
  const to = x[Math.min(x.length - 1, k + 1)]!;
  const bottom = leastBetween((t) => side * g(t), from, to, tolerance);
  return { x: bottom.x, value: side * bottom.value };
}

function rootsOf(
  g: (x: number) => number,
  at: readonly { x: number; g: number }[],
  tolerance: number,
  touch: number,
): { roots: number[]; nearest: number } {
  const roots: number[] = [];
  let nearest = at[0]!;
  const keep = (x: number) => {
    if (roots.length === 0 || x > roots[roots.length - 1]! + tolerance) roots.push(x);
  };
  for (let k = 0; k < at.length; k++) {
    const here = at[k]!;
    if (Math.abs(here.g) < Math.abs(nearest.g)) nearest = here;
    if (k > 0 && at[k - 1]!.g * here.g < 0 && Math.abs(at[k - 1]!.g) > touch && Math.abs(here.g) > touch) {
      keep(rootBetween(g, at[k - 1]!.x, here.x, at[k - 1]!.g, here.g, tolerance));
    }
    if (Math.abs(here.g) <= touch) keep(here.x);
  }
  return { roots, nearest: roots[0] ?? nearest.x };
}
