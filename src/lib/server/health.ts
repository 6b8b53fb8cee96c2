import { database } from './database';
import { log } from './log';

/** Whether the service can do its work: the database answers a query. */
export async function serviceHealth(): Promise<{ status: 'up' | 'down' }> {
	try {
		await (await database()).sequelize.query('SELECT 1');
		return { status: 'up' };
	} catch (error) {
		log().error({ err: error }, 'the database does not answer');
		return { status: 'down' };
	}
}
