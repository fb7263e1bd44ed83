// The worker's entry while the program runs from its TypeScript sources (tests); the built program starts at task.js.
import { tsImport } from 'tsx/esm/api';

const { default: runBatch } = await tsImport('./task.ts', import.meta.url);

export default runBatch;
