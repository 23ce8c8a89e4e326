import type { Model, ModelEvidence } from '../../shared-types/model.ts';
import { noiseFloor } from '../embedding/rankChoice.ts';
import { rowsOf } from './summary.ts';

/** What a person judges a model by, without the arrays that only the program needs; `usedBy` is left to the caller. */
export function evidenceOf(model: Model): Omit<ModelEvidence, 'usedBy'> {
  const { coordinates: _, singularValues: __, spectrum, A, B, diagnostics, operating = [], ...rest } = model;
  return {
    ...rest,
    spectrum: [...spectrum],
    noiseFloor: noiseFloor(spectrum, diagnostics.windows).floor,
    A: rowsOf(A, model.rank - 1),
    B: [...B],
    diagnostics: {
      ...diagnostics,
      r2: [...diagnostics.r2],
      heldOut: diagnostics.heldOut && {
        ...diagnostics.heldOut,
        oneStepR2: [...diagnostics.heldOut.oneStepR2],
      },
    },
    operating,
  };
}
