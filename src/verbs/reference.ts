/** `rimehold reference`: the site file's reference, generated from its schema. */
import { EXIT } from '../errors.ts';
import { optionsSchema, referenceYaml } from '../reference.ts';
import { writeText } from './site.ts';

export function reference(options: { write?: boolean; json?: boolean }): number {
  const schema = `${JSON.stringify(optionsSchema(), null, 2)}\n`;
  if (options.write) {
    const todo = 'run it in the folder that rimehold was built in';
    writeText('config/reference.yaml', referenceYaml(), 'the reference', todo);
    writeText('addon/options.schema.json', schema, 'the options schema', todo);
  } else {
    process.stdout.write(options.json ? schema : referenceYaml());
  }
  return EXIT.yes;
}
