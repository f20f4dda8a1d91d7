/** Factor of a two-sided 95 % interval of a normal deviate. */
export const quantileNormal95 = 1.959963984540054;

/**
 * Factor of a two-sided 95 % interval of Student's t with nu degrees of freedom, by the expansion in 1/nu
 * (Abramowitz and Stegun, 26.7.5: from memory); within 0.5 % from nu = 5 on.
 */
export function studentFactor95(nu: number): number {
  const z = quantileNormal95;
  const n = Math.max(3, nu);
  const z3 = z ** 3;
  const z5 = z ** 5;
  const z7 = z ** 7;
  return (
    z +
    (z3 + z) / (4 * n) +
    (5 * z5 + 16 * z3 + 3 * z) / (96 * n * n) +
    (3 * z7 + 19 * z5 + 17 * z3 - 15 * z) / (384 * n ** 3)
  );
}
