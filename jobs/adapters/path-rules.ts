import {
  archiveKind,
  assignmentFromPath,
  isProgram,
  pathProblem,
  sheetKind,
  unpackedPath,
} from '../instrument/index.ts';
import type { PathRules } from '../ports/index.ts';

export const pathRules: PathRules = {
  problem: pathProblem,
  kind: (path) => {
    if (sheetKind(path) !== undefined || isProgram(path)) return 'sheet';
    return archiveKind(path) !== undefined ? 'archive' : 'data';
  },
  unpacked: unpackedPath,
  assignment: assignmentFromPath,
};
