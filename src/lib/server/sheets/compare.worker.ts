import type { WorkbookDifference } from '$lib/assay';
import { serveTask } from '../jobs/worker-side';
import { compareHere, type CompareTask } from './compare-here';

serveTask<CompareTask, WorkbookDifference>(compareHere);
