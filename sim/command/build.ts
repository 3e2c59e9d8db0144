/** npm run build: compiled JavaScript with declarations, and the JSON Schema of the probe file, into dist/. */
import { execFileSync } from 'node:child_process';
import { chmodSync, rmSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { probeSchema } from '../probe/schema.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));

rmSync(`${root}/dist`, { recursive: true, force: true });
execFileSync(process.execPath, [`${root}/node_modules/typescript/bin/tsc`, '-p', `${root}/sim/tsconfig.build.json`], { stdio: 'inherit' });
writeFileSync(`${root}/dist/probe.schema.json`, `${JSON.stringify(probeSchema(), null, 2)}\n`);
chmodSync(`${root}/dist/sim/command/hallproof.js`, 0o755);
