import { expect, it } from 'vitest';
import { standJsonSchema } from '../../src/stand/jsonSchema.js';

it('config/stand.schema.json is made from the schema in the code (npx vitest run tests/stand/jsonSchema.test.ts --update makes it anew)', async () => {
  await expect(JSON.stringify(standJsonSchema(), null, 2) + '\n').toMatchFileSnapshot('../../config/stand.schema.json');
});
