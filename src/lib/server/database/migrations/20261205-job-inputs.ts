import { DataTypes, type QueryInterface } from 'sequelize';

/**
 * What a job computes stands in a table of its own: it can have many megabytes, and a row of `jobs` is written anew at every
 * progress, heartbeat and change of state.
 */
export async function up(q: QueryInterface): Promise<void> {
	await q.createTable('job_inputs', {
		job_id: {
			type: DataTypes.UUID,
			primaryKey: true,
			allowNull: false,
			references: { model: 'jobs', key: 'id' }
		},
		input: { type: DataTypes.JSON, allowNull: false }
	});
	await q.sequelize.query('INSERT INTO job_inputs (job_id, input) SELECT id, input FROM jobs');
	// The dialect would copy the whole table to drop a column; SQLite can do it in place.
	await q.sequelize.query('ALTER TABLE jobs DROP COLUMN input');
}
