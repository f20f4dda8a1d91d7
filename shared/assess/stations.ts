/** First station at or past a chainage, by bisection. */
export function stationFrom(chainageM: ArrayLike<number>, s: number): number {
  let low = 0;
  let high = chainageM.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (chainageM[middle]! < s) low = middle + 1;
    else high = middle;
  }
  return low;
}
