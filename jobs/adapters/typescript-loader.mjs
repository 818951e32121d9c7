// Preloaded into worker threads that run from the sources: `--import tsx` does nothing inside a worker thread of Node 20,
// while its register function called there does.
import { register } from 'tsx/esm/api';

register();
