'use client';

import { detailAt, type RequestError } from '@/components/api/request';
import { CheckField, SelectField } from '@/components/ui/field';
import { inWords } from '@/components/words/counts';
import { fieldCount, templateCatalogue, type OptionDeclaration } from '@/lib/templates';
import { BinWeightField } from './bin-weight-field';
import { choiceLabels, optionLabels, powerLabels } from './option-words';
import type { TemplateSettings } from './prediction';

const catalogue = templateCatalogue().map(({ id, title, summary, options }) => ({
  id,
  title,
  summary,
  options,
}));

/** Options that another template takes over from this one; those that it doesn't have go. */
export function carryOver(id: string, options: Record<string, unknown>): TemplateSettings {
  const names = catalogue.find((template) => template.id === id)?.options.map(({ name }) => name) ?? [];
  const kept = Object.entries(options).filter(([name]) => names.includes(name));
  const declared = catalogue.find((template) => template.id === id)?.options ?? [];
  const lists = declared.some(({ name, kind }) => name === 'fields' && kind === 'fields');
  const fields = Array.isArray(options.fields) && !lists ? options.fields.length : options.fields;
  const most = declared.flatMap((option) =>
    option.name === 'fields' && 'max' in option ? [option.max] : [],
  )[0];
  const capped =
    typeof fields === 'number' && names.includes('fields')
      ? [['fields', Math.min(fields, most ?? fields)] as const]
      : [];
  return { id, options: Object.fromEntries([...kept, ...capped]) };
}

interface OptionProps {
  option: OptionDeclaration;
  settings: TemplateSettings;
  hasEdges: boolean;
  error?: string;
  onValue: (value: unknown) => void;
}

function Option({ option, settings, hasEdges, error, onValue }: OptionProps) {
  const { name } = option;
  const value = settings.options[name];
  const label = optionLabels[name] ?? name;
  switch (option.kind) {
    case 'integer': {
      return (
        <SelectField
          label={label}
          name={name}
          value={String(value ?? option.default)}
          options={Array.from({ length: option.max - option.min + 1 }, (_, i) => ({
            value: String(option.min + i),
            label: inWords(option.min + i),
          }))}
          error={error}
          onChange={(event) => onValue(Number(event.target.value))}
        />
      );
    }
    case 'fields': {
      const count = fieldCount(value ?? option.default);
      const light = Array.isArray(value) ? value.filter((kind) => kind === 'light').length : 0;
      const choose = (fields: number, lightOnes: number) =>
        onValue(
          lightOnes === 0
            ? fields
            : Array.from({ length: fields }, (_, i) => (i < lightOnes ? 'light' : 'heavy')),
        );
      return (
        <>
          <SelectField
            label={label}
            name={name}
            value={String(count)}
            options={Array.from({ length: option.max - option.min + 1 }, (_, i) => ({
              value: String(option.min + i),
              label: inWords(option.min + i),
            }))}
            error={error}
            onChange={(event) =>
              choose(Number(event.target.value), Math.min(light, Number(event.target.value)))
            }
          />
          <SelectField
            label="Of them light, m < 3H/2"
            name={`${name}-light`}
            value={String(light)}
            options={Array.from({ length: count + 1 }, (_, i) => ({
              value: String(i),
              label: i === 0 ? 'none' : inWords(i),
            }))}
            onChange={(event) => choose(count, Number(event.target.value))}
          />
        </>
      );
    }
    case 'choice':
      return (
        <SelectField
          label={label}
          name={name}
          value={String(value ?? option.default)}
          options={option.values.map((choice) => ({
            value: String(choice),
            label: choiceLabels[String(choice)] ?? String(choice),
          }))}
          error={error}
          onChange={(event) => onValue(option.values.find((choice) => String(choice) === event.target.value))}
        />
      );
    case 'boolean':
      return (
        <SelectField
          label={label}
          name={name}
          value={value === undefined || value === null ? String(hasEdges) : String(value)}
          options={[
            { value: 'true', label: 'averaged over each bin', disabled: !hasEdges },
            { value: 'false', label: 'at κ of each bin' },
          ]}
          help={hasEdges ? undefined : 'The measurement has no bin edges.'}
          error={error}
          onChange={(event) => onValue(event.target.value === 'true')}
        />
      );
    // The one number among the options: the others are choices.
    case 'number':
      return (
        <BinWeightField
          name={name}
          label={label}
          value={typeof value === 'number' ? value : option.default}
          error={error}
          onValue={onValue}
        />
      );
    case 'powers': {
      const chosen = Array.isArray(value) ? (value as number[]) : [...option.default];
      return (
        <fieldset className="col-span-full min-w-0">
          <legend className="font-controls text-control text-ink">Smooth background, powers fitted</legend>
          <div className="flex flex-wrap gap-x-4">
            {Array.from({ length: option.max - option.min + 1 }, (_, i) => option.min + i).map((power) => (
              <CheckField
                key={power}
                name={`power${power}`}
                label={<span className="font-words text-[16px]">{powerLabels[String(power)]}</span>}
                checked={chosen.includes(power)}
                onChange={(event) =>
                  onValue(
                    (event.target.checked
                      ? [...chosen, power]
                      : chosen.filter((other) => other !== power)
                    ).sort((a, b) => a - b),
                  )
                }
              />
            ))}
          </div>
          {error ? <p className="mb-0 font-controls text-note text-bad">{error}</p> : null}
        </fieldset>
      );
    }
  }
}

export interface TemplateFormProps {
  settings: TemplateSettings;
  hasEdges: boolean;
  error: RequestError | null;
  onSettings: (settings: TemplateSettings) => void;
}

/** Choice of template and options, drawn from the templates' own declarations. */
export function TemplateForm({ settings, hasEdges, error, onSettings }: TemplateFormProps) {
  const entry = catalogue.find(({ id }) => id === settings.id) ?? catalogue[0];
  const shown = entry.options.filter(
    ({ name }) => name !== 'binWeight' || (hasEdges && settings.options.binAverage !== false),
  );
  const order = (option: OptionDeclaration) => (option.kind === 'powers' ? 1 : 0);
  return (
    <div className="grid max-w-figure grid-cols-2 gap-x-4 gap-y-2 max-tablet:grid-cols-1">
      <SelectField
        label="Template"
        name="template"
        value={entry.id}
        options={catalogue.map(({ id, title }) => ({ value: id, label: title }))}
        error={detailAt(error, 'template.id')}
        onChange={(event) => onSettings(carryOver(event.target.value, settings.options))}
      />
      {[...shown]
        .sort((a, b) => order(a) - order(b))
        .map((option) => (
          <Option
            key={option.name}
            option={option}
            settings={settings}
            hasEdges={hasEdges}
            error={detailAt(error, `template.options.${option.name}`)}
            onValue={(value) =>
              onSettings({ id: settings.id, options: { ...settings.options, [option.name]: value } })
            }
          />
        ))}
    </div>
  );
}
