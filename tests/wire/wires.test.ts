import { FIXTURES } from './boards.ts';
import { keepsTheContract } from './contract.ts';

for (const [name, fixture] of Object.entries(FIXTURES)) keepsTheContract(name, fixture);
