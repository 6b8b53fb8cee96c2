/** The sheet reader off the page's thread, so that typing and scrolling never wait for it. */
import type { Call, Reply } from './messages';
import { Examiner } from './tasks';

const examiner = new Examiner();

addEventListener('message', ({ data }: MessageEvent<Call>) => {
	postMessage(replyTo(data));
});

function replyTo({ id, name, task }: Call): Reply {
	try {
		return { id, value: examiner.perform(name, task) };
	} catch (caught) {
		return { id, failed: caught instanceof Error ? caught.message : String(caught) };
	}
}
