import { DataTypes, type QueryInterface } from 'sequelize';

/** Width of the mass balance of a group, ± % of the charge; empty: as the site has it. */
export async function up(q: QueryInterface): Promise<void> {
	await q.addColumn('groups', 'mass_balance_percent', { type: DataTypes.DOUBLE, allowNull: true });
}
