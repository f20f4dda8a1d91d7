import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { seededStream } from '../../data/synthetic/random.ts';
import { ROOT } from './shared.ts';

/** A recording of the demonstration, by its file name. */
export function demoFile(name: string): { name: string; content: Uint8Array<ArrayBuffer> } {
  return { name, content: new Uint8Array(readFileSync(join(ROOT, 'data/demo', name))) };
}

/**
 * A small log with one curve: straight, 60 degrees to the left on 300 m, straight, at 20 m/s and 1 Hz,
 * with noise of 0.4 m a coordinate, 0.05 m/s and 0.3 degrees that `seed` fixes.
 */
export function smallCsv(seed = 0): string {
  const lines = ['time,lat,lon,speed_ms,course'];
  const stream = seededStream(seed + 1);
  const [lat0, lon0] = [50, 8];
  const metresPerDegree = 111_200;
  let [x, y, heading] = [0, 0, 0];
  for (let t = 0; t < 120; t++) {
    const turning = t >= 50 && t < 50 + ((Math.PI / 3) * 300) / 20;
    const lat = lat0 + (y + 0.4 * stream.normal()) / metresPerDegree;
    const lon = lon0 + (x + 0.4 * stream.normal()) / (metresPerDegree * Math.cos((lat0 * Math.PI) / 180));
    const speed = 20 + 0.05 * stream.normal();
    const course = (((90 - (heading * 180) / Math.PI + 0.3 * stream.normal()) % 360) + 360) % 360;
    const time = new Date(Date.UTC(2025, 4, 6, 7, 0, t)).toISOString();
    lines.push(`${time},${lat.toFixed(7)},${lon.toFixed(7)},${speed.toFixed(2)},${course.toFixed(1)}`);
    if (turning) heading += 20 / 300;
    x += 20 * Math.cos(heading);
    y += 20 * Math.sin(heading);
  }
  return `${lines.join('\n')}\n`;
}
