// SPDX-License-Identifier: MIT
// The page's modules and these tests keep the types that they state.
import {test} from 'node:test';
import assert from 'node:assert/strict';
import {spawnSync} from 'node:child_process';
import {fileURLToPath} from 'node:url';

const TSC = fileURLToPath(new URL('node_modules/typescript/bin/tsc', import.meta.url));

for (const folder of ['../../estimator/wall/page', '.']) {
  test(`types of ${folder}`, () => {
    const run = spawnSync(process.execPath, [TSC, '--noEmit', '-p', fileURLToPath(new URL(`${folder}/jsconfig.json`, import.meta.url))], {encoding: 'utf8'});
    assert.equal(run.stdout + run.stderr, '');
    assert.equal(run.status, 0);
  });
}
