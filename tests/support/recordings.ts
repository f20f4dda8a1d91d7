import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { ROOT } from './shared.ts';

/** A recording of the demonstration, by its file name. */
export function demoFile(name: string): { name: string; content: Uint8Array<ArrayBuffer> } {
  return { name, content: new Uint8Array(readFileSync(join(ROOT, 'data/demo', name))) };
}

/**
 * A small log with one curve: straight, 60 degrees to the left on 300 m, straight, at 20 m/s and 1 Hz.
 * `seed` shifts it, so that no two are the same bytes.
 */
export function smallCsv(seed = 0): string {
  const lines = ['time,lat,lon,speed_ms,course'];
  const [lat0, lon0] = [50 + seed * 1e-4, 8];
  const metresPerDegree = 111_200;
  let [x, y, heading] = [0, 0, 0];
  for (let t = 0; t < 120; t++) {
    const turning = t >= 50 && t < 50 + ((Math.PI / 3) * 300) / 20;
    const lat = lat0 + y / metresPerDegree;
    const lon = lon0 + x / (metresPerDegree * Math.cos((lat0 * Math.PI) / 180));
    const course = (((90 - (heading * 180) / Math.PI) % 360) + 360) % 360;
    const time = new Date(Date.UTC(2025, 4, 6, 7, 0, t)).toISOString();
    lines.push(`${time},${lat.toFixed(7)},${lon.toFixed(7)},20.00,${course.toFixed(1)}`);
    if (turning) heading += 20 / 300;
    x += 20 * Math.cos(heading);
    y += 20 * Math.sin(heading);
  }
  return `${lines.join('\n')}\n`;
}
