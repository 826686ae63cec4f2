/** A process that lives one case of the plan benchmark: told which by a message, answers with its figures and ends. */
import { runCase, type CaseOrder } from './plan-case.ts';

process.once('message', (order) => {
  process.send?.(runCase(order as CaseOrder), () => process.disconnect());
});
