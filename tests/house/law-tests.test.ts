import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { lawTests } from '../../tools/law-tests.ts';
import { plant } from './planted.ts';

describe('the choice of tests that run again on a fresh seed', () => {
  const tree = plant({
    'tests/map/states-one.test.ts': "import fc from 'fast-check';\n",
    'tests/map/through-two.test.ts': "import { one } from './one.ts';\nimport './other.ts';\n",
    'tests/map/one.ts': "import { two } from '../wire/two.ts';\n",
    'tests/wire/two.ts': "import fc from 'fast-check';\n",
    'tests/wire/examples.test.ts': "import { it } from 'vitest';\nconst text = \"import fc from 'fast-check'\";\n",
  });
  afterAll(() => tree.remove());

  it('takes those that state a law, themselves or through what they import, and no others', () => {
    expect(lawTests(join(tree.folder, 'tests'))).toEqual(['map/states-one.test.ts', 'map/through-two.test.ts']);
  });
});
