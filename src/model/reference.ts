import { LeadspanError, show } from '../base/errors.ts';
import { nearestName } from '../base/options.ts';
import { FLOWS } from './flows.ts';
import { MAPS } from './maps.ts';
import type { Parameters, ReferenceModel } from './types.ts';

const MODELS: ReadonlyMap<string, ReferenceModel> = new Map(
  [...FLOWS, ...MAPS].map((model) => [model.name, model]),
);

/** Names of the reference models. */
export function referenceModelNames(): string[] {
  return [...MODELS.keys()];
}

/**
 * A system of the literature with its parameters, field, Jacobian, start and source.
 * @param parameters replace the published ones, by name
 * @throws LeadspanError BAD_OPTION for an unknown name or parameter, with the nearest known one
 */
export function referenceModel(name: string, parameters: Parameters = {}): ReferenceModel {
  const model = MODELS.get(name);
  if (!model) {
    const guess = nearestName(String(name), referenceModelNames());
    throw new LeadspanError(
      'BAD_OPTION',
      `There is no reference model ${show(name)}${guess ? `; did you mean ${show(guess)}?` : '.'} They are: ${referenceModelNames().join(', ')}.`,
      { field: 'model' },
    );
  }
  for (const [key, value] of Object.entries(parameters)) {
    if (!Object.hasOwn(model.parameters, key))
      throw new LeadspanError(
        'BAD_OPTION',
        `Model ${name} has no parameter ${show(key)}. It has: ${Object.keys(model.parameters).join(', ') || 'none'}.`,
        { field: `parameters.${key}` },
      );
    if (typeof value !== 'number' || !Number.isFinite(value))
      throw new LeadspanError(
        'BAD_OPTION',
        `Parameter ${key} of ${name} must be a finite number; got ${show(value)}.`,
        {
          field: `parameters.${key}`,
        },
      );
  }
  return { ...model, parameters: { ...model.parameters, ...parameters } };
}
