/**
 * Minimises f by the simplex method of Nelder and Mead (1965, The Computer Journal 7, 308), with the usual coefficients
 * (reflection 1, expansion 2, contraction and shrinkage 1/2).
 *
 * @param start first vertex; @param steps offset of the other vertices, one a coordinate
 * @param evaluations most evaluations of f
 * @param tolerance stops when the values of the simplex lie within this
 */
export function nelderMead(
  f: (x: readonly number[]) => number,
  start: readonly number[],
  steps: readonly number[],
  evaluations: number,
  tolerance: number,
): { readonly x: readonly number[]; readonly value: number } {
  const n = start.length;
  let used = 0;
  const evaluate = (x: readonly number[]): { x: readonly number[]; value: number } => {
    used++;
    const value = f(x);
    return { x, value: Number.isFinite(value) ? value : Number.MAX_VALUE };
  };
  const simplex = [evaluate(start)];
  for (let k = 0; k < n; k++) simplex.push(evaluate(start.map((value, j) => (j === k ? value + steps[k]! : value))));
  const byValue = (a: { value: number }, b: { value: number }): number => a.value - b.value;
  simplex.sort(byValue);
  while (used < evaluations && n > 0) {
    const best = simplex[0]!;
    const worst = simplex[n]!;
    if (worst.value - best.value < tolerance) break;
    const centre = best.x.map((_, j) => simplex.reduce((sum, vertex, k) => (k < n ? sum + vertex.x[j]! : sum), 0) / n);
    const along = (t: number): readonly number[] => centre.map((c, j) => c + t * (worst.x[j]! - c));
    const reflected = evaluate(along(-1));
    if (reflected.value < best.value) {
      const expanded = evaluate(along(-2));
      simplex[n] = expanded.value < reflected.value ? expanded : reflected;
    } else if (reflected.value < simplex[n - 1]!.value) {
      simplex[n] = reflected;
    } else {
      const contracted = evaluate(along(reflected.value < worst.value ? -0.5 : 0.5));
      if (contracted.value < Math.min(reflected.value, worst.value)) {
        simplex[n] = contracted;
      } else {
        for (let k = 1; k <= n; k++) {
          simplex[k] = evaluate(simplex[k]!.x.map((value, j) => 0.5 * (value + best.x[j]!)));
        }
      }
    }
    simplex.sort(byValue);
  }
  return simplex[0]!;
}
