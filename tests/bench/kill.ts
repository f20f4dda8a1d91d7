// Kills the server at random moments: node dist/tests/bench/kill.js [rounds] [seed]
import { killRounds } from '../support/kill-rounds.ts';
import { makeFolder, removeFolders } from '../support/server.ts';

const rounds = Number(process.argv[2] ?? 120);
const seed = Number(process.argv[3] ?? 1);
const began = performance.now();
const report = await killRounds(await makeFolder(), rounds, seed);
await removeFolders();
console.log(JSON.stringify({ seed, ...report, seconds: Math.round((performance.now() - began) / 1000) }, null, 1));
if (report.lost.length + report.notWhole.length + report.halfMade.length > 0) process.exitCode = 1;
