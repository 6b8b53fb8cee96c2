import type { Sequelize } from 'sequelize';
import { initAudit } from './audit';
import { initFits } from './fits';
import { initPeople } from './people';
import { initRecipes } from './recipes';
import { initRecords } from './records';
import { initStudies } from './studies';

export * from './audit';
export * from './fits';
export * from './people';
export * from './recipes';
export * from './records';
export * from './studies';
export { newId } from './common';

export function initModels(sequelize: Sequelize): void {
	initPeople(sequelize);
	initStudies(sequelize);
	initFits(sequelize);
	initRecipes(sequelize);
	initRecords(sequelize);
	initAudit(sequelize);
}
