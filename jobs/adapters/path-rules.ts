import { archiveKind, assignmentFromPath, isProgram, pathProblem, sheetKind } from '../instrument/index.ts';
import type { PathRules } from '../ports/index.ts';

export const pathRules: PathRules = {
  problem: pathProblem,
  kind: (path) => {
    if (sheetKind(path) !== undefined || isProgram(path)) return 'sheet';
    return archiveKind(path) !== undefined ? 'archive' : 'data';
  },
  assignment: assignmentFromPath,
};
