/** `rimehold reference`: the site file's reference and the published schemas, generated from the declarations. */
import { EXIT } from '../errors.ts';
import { optionsSchema, referenceYaml } from '../reference.ts';
import { nightSheetJsonSchema } from '../reports/night-schema.ts';
import { writeText } from './site.ts';

export function reference(options: { write?: boolean; json?: boolean }): number {
  const schema = `${JSON.stringify(optionsSchema(), null, 2)}\n`;
  if (options.write) {
    const todo = 'run it in the folder that rimehold was built in';
    writeText('config/reference.yaml', referenceYaml(), 'the reference', todo);
    writeText('addon/options.schema.json', schema, 'the options schema', todo);
    writeText('addon/night-sheet.schema.json', sheetSchema(), 'the schema of the night sheet', todo);
  } else {
    process.stdout.write(options.json ? schema : referenceYaml());
  }
  return EXIT.yes;
}

function sheetSchema(): string {
  return `${JSON.stringify(nightSheetJsonSchema(), null, 2)}\n`;
}
