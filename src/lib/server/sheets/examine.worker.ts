import { serveTask } from '../jobs/worker-side';
import { examineHere, type Examined, type ExamineTask } from './examine-here';

serveTask<ExamineTask, Examined>(examineHere);
