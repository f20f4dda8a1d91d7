/** A reproducible source of random numbers: the same seed gives the same stream on every machine. */
export interface RandomStream {
  /** Uniform on [0, 1) with 32 bits. */
  uniform(): number;
  /** Uniform on [low, high). */
  between(low: number, high: number): number;
  /** Logarithmically uniform on [low, high), both positive. */
  logBetween(low: number, high: number): number;
  /** Standard normal deviate. */
  normal(): number;
  /** True with the given probability. */
  chance(probability: number): boolean;
}

const TWO_32 = 4294967296;

/**
 * Seeded stream.
 *
 * Generator sfc32 (Chris Doty-Humphrey, PractRand, 2010), state filled from the seed and warmed up by
 * 16 rounds; normal deviates by the polar method (Marsaglia and Bray, 1964).
 *
 * @param seed any integer; the lower 53 bits count
 */
export function seededStream(seed: number): RandomStream {
  let a = seed >>> 0;
  let b = Math.floor(seed / TWO_32) >>> 0;
  let c = 0x9e3779b9;
  let counter = 1;
  let spare = Number.NaN;

  function uniform(): number {
    const sum = (((a + b) | 0) + counter) | 0;
    counter = (counter + 1) | 0;
    a = b ^ (b >>> 9);
    b = (c + (c << 3)) | 0;
    c = (c << 21) | (c >>> 11);
    c = (c + sum) | 0;
    return (sum >>> 0) / TWO_32;
  }

  function normal(): number {
    if (!Number.isNaN(spare)) {
      const value = spare;
      spare = Number.NaN;
      return value;
    }
    for (;;) {
      const x = 2 * uniform() - 1;
      const y = 2 * uniform() - 1;
      const square = x * x + y * y;
      if (square >= 1 || square === 0) continue;
      const factor = Math.sqrt((-2 * Math.log(square)) / square);
      spare = y * factor;
      return x * factor;
    }
  }

  for (let i = 0; i < 16; i += 1) uniform();
  return {
    uniform,
    normal,
    between: (low, high) => low + (high - low) * uniform(),
    logBetween: (low, high) => low * (high / low) ** uniform(),
    chance: (probability) => uniform() < probability,
  };
}

/**
 * First-order Gauss-Markov (Ornstein-Uhlenbeck) sequence sampled at irregular instants:
 * x(t + dt) = rho x(t) + sigma sqrt(1 - rho^2) n, rho = exp(-dt / tau); stationary from the first sample.
 */
export function gaussMarkov(random: RandomStream, timeS: Float64Array, sigma: number, tauS: number): Float64Array {
  const out = new Float64Array(timeS.length);
  let value = sigma * random.normal();
  for (let i = 0; i < timeS.length; i += 1) {
    if (i > 0) {
      const rho = Math.exp(-(timeS[i]! - timeS[i - 1]!) / tauS);
      value = rho * value + sigma * Math.sqrt(1 - rho * rho) * random.normal();
    }
    out[i] = value;
  }
  return out;
}
