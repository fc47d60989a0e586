import { badInput } from '../base/errors.ts';
import type { FunctionModel } from './types.ts';

/**
 * Checks a model given as functions.
 * @throws LeadspanError BAD_INPUT naming the field
 */
export function checkFunctionModel(model: unknown): FunctionModel {
  if (typeof model !== 'object' || model === null)
    badInput('model', 'a name, or an object with kind, variables, field and start', model);
  const m = model as Partial<FunctionModel>;
  if (m.kind !== 'flow' && m.kind !== 'map') badInput('model.kind', "'flow' or 'map'", m.kind);
  if (
    !Array.isArray(m.variables) ||
    m.variables.length === 0 ||
    !m.variables.every((v) => typeof v === 'string')
  )
    badInput('model.variables', 'a list of at least one name', m.variables);
  if (new Set(m.variables).size !== m.variables.length)
    badInput('model.variables', 'distinct names', m.variables);
  if (typeof m.field !== 'function')
    badInput('model.field', 'a function (state, out, time, parameters)', m.field);
  if (m.jacobian !== undefined && typeof m.jacobian !== 'function')
    badInput('model.jacobian', 'a function, or left out', m.jacobian);
  if (
    !Array.isArray(m.start) ||
    m.start.length !== m.variables.length ||
    !m.start.every((x) => Number.isFinite(x))
  )
    badInput('model.start', `${m.variables.length} finite numbers, one per variable`, m.start);
  for (const [name, value] of Object.entries(m.parameters ?? {}))
    if (typeof value !== 'number' || !Number.isFinite(value))
      badInput(`model.parameters.${name}`, 'a finite number', value);
  return m as FunctionModel;
}
