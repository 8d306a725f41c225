/** Nodes and weights of Gauss-Legendre quadrature on [-1, 1], by Newton's iteration on the Legendre polynomial. */
export function gaussLegendre(n: number): { readonly nodes: Float64Array; readonly weights: Float64Array } {
  const nodes = new Float64Array(n);
  const weights = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    let x = Math.cos((Math.PI * (i + 0.75)) / (n + 0.5));
    let slope = 0;
    for (let k = 0; k < 100; k++) {
      let before = 1;
      let value = x;
      for (let j = 2; j <= n; j++) [before, value] = [value, ((2 * j - 1) * x * value - (j - 1) * before) / j];
      slope = (n * (x * value - before)) / (x * x - 1);
      const step = value / slope;
      x -= step;
      if (Math.abs(step) < 1e-16) break;
    }
    nodes[i] = x;
    weights[i] = 2 / ((1 - x * x) * slope * slope);
  }
  return { nodes, weights };
}

const ORDER = 40;
let rule: ReturnType<typeof gaussLegendre> | null = null;

/** Integral of a smooth function over [a, b], by `panels` panels of 40 nodes. */
export function integrate(f: (x: number) => number, a: number, b: number, panels: number): number {
  rule ??= gaussLegendre(ORDER);
  const half = (b - a) / panels / 2;
  let sum = 0;
  for (let panel = 0; panel < panels; panel++) {
    const centre = a + (2 * panel + 1) * half;
    for (let i = 0; i < ORDER; i++) sum += rule.weights[i]! * f(centre + rule.nodes[i]! * half);
  }
  return sum * half;
}
