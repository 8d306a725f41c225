import { z } from 'zod';
import { standSchema } from './schema.js';

/** The JSON Schema of a stand file, for editors: made from the schema that loads it, so that the two cannot differ. */
export function standJsonSchema(): object {
  return z.toJSONSchema(standSchema, { io: 'input', target: 'draft-7' });
}
