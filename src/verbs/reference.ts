/** `rimehold reference`: the site file's reference, generated from its schema. */
import { writeFileSync } from 'node:fs';
import { EXIT } from '../errors.ts';
import { optionsSchema, referenceYaml } from '../reference.ts';

export function reference(options: { write?: boolean; json?: boolean }): number {
  const schema = `${JSON.stringify(optionsSchema(), null, 2)}\n`;
  if (options.write) {
    writeFileSync('config/reference.yaml', referenceYaml());
    writeFileSync('addon/options.schema.json', schema);
  } else {
    process.stdout.write(options.json ? schema : referenceYaml());
  }
  return EXIT.yes;
}
