/** Writes batches for ever and prints how many are flushed; the test ends it with SIGKILL. */
import { openStore } from '../../src/store/store.ts';
import { baseRecord } from '../reports/night-story.ts';

const T0 = Date.UTC(2026, 6, 14, 10);
const store = openStore(process.argv[2], { siteId: 'juniper' });
let batch = 0;

function writeOne(): void {
  const first = batch * 50;
  store.addReadings(
    Array.from({ length: 50 }, (_, i) => ({
      point: 'leaving-water' as const,
      atMs: T0 + first + i,
      value: first + i,
    })),
  );
  store.addRecord(baseRecord(T0 + batch, 1));
  if (store.flush().fault) process.exit(1);
  batch += 1;
  console.log(batch);
  setTimeout(writeOne, 2);
}

writeOne();
