// npm run bench [-- ingest scaling pipeline mutations uploads kill] [--quick]: speed, memory and growth, each part in a process of
// its own so that one does not warm or burden the next. Ratios within one run are what counts: machines are noisy.
import { spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';

const PARTS = ['ingest', 'scaling', 'pipeline', 'mutations', 'uploads', 'kill'] as const;
const args = process.argv.slice(2);
const quick = args.includes('--quick');
const wanted = PARTS.filter((part) => args.includes(part));
const parts = wanted.length > 0 ? wanted : PARTS;

for (const part of parts) {
  console.log(`\n== ${part}`);
  if (part === 'ingest') child('ingest.js', 'benchIngest', quick ? 30_000 : 300_000);
  else if (part === 'scaling') scaling();
  else if (part === 'pipeline') child('whole-pipeline.js', 'benchPipeline', quick ? 20_000 : 1_000_000);
  else node([file(`${part}.js`)], 'inherit');
}

/** Growth from 10^5 to 10^6 fixes, and the time against a local circle fit on the same fixes. */
function scaling(): void {
  const rows = (quick ? [10_000, 30_000] : [100_000, 1_000_000]).map((fixes) => {
    const text = child('scaling.js', 'benchScaling', fixes);
    return JSON.parse(text) as { fixes: number; estimateS: number; alignmentS: number; naiveS: number };
  });
  const [small, large] = rows;
  if (small === undefined || large === undefined) return;
  const total = (row: typeof small) => row.estimateS + row.alignmentS;
  console.log(
    `growth: ${(large.fixes / small.fixes).toFixed(1)} times the fixes take ${(total(large) / total(small)).toFixed(1)} times as long; ` +
      `the local circle fit takes ${(small.naiveS / total(small)).toFixed(3)} of the time`,
  );
}

/** Calls one exported function with a number in a fresh process; returns what it printed, having shown it. */
function child(name: string, call: string, argument: number): string {
  const code = `const m = await import(${JSON.stringify(new URL(name, import.meta.url).href)}); await m.${call}(${String(argument)});`;
  const text = node(['--expose-gc', '--max-old-space-size=8192', '--input-type=module', '-e', code], 'pipe');
  process.stdout.write(text);
  return text;
}

function node(command: string[], stdout: 'pipe' | 'inherit'): string {
  const result = spawnSync(process.execPath, command, { stdio: ['ignore', stdout, 'inherit'], encoding: 'utf8' });
  if (result.status !== 0) process.exitCode = 1;
  // With stdout inherited there is nothing to hand back, whatever the types say.
  return stdout === 'inherit' ? '' : result.stdout;
}

function file(name: string): string {
  return fileURLToPath(new URL(name, import.meta.url));
}
