/** The sine that fits a short stretch of samples best, by least squares. */

export interface Sine {
  /** Radians per sample. */
  w: number;
  /** Mean square of the sine, and of what it leaves over beside a constant. */
  power: number;
  rest: number;
}

interface Fit {
  cos: number;
  sin: number;
  constant: number;
}

/** x[n] = cos · cos(w m) + sin · sin(w m) + constant, m counted from the middle of the stretch, where odd and even part ways. */
function fit(x: Float64Array, from: number, to: number, w: number): Fit {
  const middle = (from + to - 1) / 2;
  const [turnCos, turnSin] = [Math.cos(w), Math.sin(w)];
  let c = Math.cos(w * (from - middle));
  let s = Math.sin(w * (from - middle));
  let [cc, ss, c1, xc, xs, x1] = [0, 0, 0, 0, 0, 0];
  for (let n = from; n < to; n++) {
    const v = x[n];
    cc += c * c;
    ss += s * s;
    c1 += c;
    xc += v * c;
    xs += v * s;
    x1 += v;
    const next = c * turnCos - s * turnSin;
    s = s * turnCos + c * turnSin;
    c = next;
  }
  const count = to - from;
  const determinant = cc * count - c1 * c1;
  return {
    cos: (xc * count - x1 * c1) / determinant,
    sin: xs / ss,
    constant: (x1 * cc - xc * c1) / determinant,
  };
}

function restOf(x: Float64Array, w: number, { cos, sin, constant }: Fit): number {
  const middle = (x.length - 1) / 2;
  const [turnCos, turnSin] = [Math.cos(w), Math.sin(w)];
  let c = Math.cos(w * -middle);
  let s = Math.sin(w * -middle);
  let sum = 0;
  for (let n = 0; n < x.length; n++) {
    sum += (x[n] - cos * c - sin * s - constant) ** 2;
    const next = c * turnCos - s * turnSin;
    s = s * turnCos + c * turnSin;
    c = next;
  }
  return sum / x.length;
}

/** Fits a sine of about the frequency `w` (radians per sample); how the phase moves from half to half mends the frequency. */
export function fitSine(x: Float64Array, w: number): Sine {
  const half = x.length >> 1;
  for (let round = 0; round < 2; round++) {
    const [one, other] = [fit(x, 0, half, w), fit(x, half, 2 * half, w)];
    const turned = Math.atan2(-other.sin, other.cos) - Math.atan2(-one.sin, one.cos) - w * half;
    w += Math.atan2(Math.sin(turned), Math.cos(turned)) / half;
  }
  const whole = fit(x, 0, x.length, w);
  return { w, power: (whole.cos ** 2 + whole.sin ** 2) / 2, rest: restOf(x, w, whole) };
}
