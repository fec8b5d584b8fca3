/** The fields of the engine sheet, each with its unit and what it is for. */
import type { EngineSheetInput } from '../../../shared/contract/vehicles.ts'
import { Checkbox, Field, Select } from '../../ui/field.tsx'
import { fuels, type NumberName, type SheetDraft } from './sheet-form.ts'

interface SheetFieldsProps {
  readonly draft: SheetDraft
  readonly errors: Readonly<Record<string, string>>
  readonly onChange: (draft: SheetDraft) => void
}

const engine: readonly [NumberName, string, string][] = [
  ['displacementL', 'Displacement', 'litres, all cylinders together'],
  ['cylinders', 'Cylinders', 'how many'],
  ['revLimitRpm', 'Rev limit', 'rpm'],
]
const injectors: readonly [NumberName, string, string][] = [
  ['injectorFlowCcMin', 'Injector flow', 'cc/min of one injector, at the pressure beside'],
  ['injectorPressureKpa', 'At pressure', 'kPa across the injector; 3 bar is 300'],
  ['deadTimeMs', 'Dead time', 'ms at 14 V'],
]
const sensor: readonly [NumberName, string, string][] = [
  ['lambdaLow', 'Wideband reads from', 'lambda at its rich limit'],
  ['lambdaHigh', 'to', 'lambda at its lean limit'],
]

export function SheetFields({ draft, errors, onChange }: SheetFieldsProps) {
  const field = ([name, label, hint]: readonly [NumberName, string, string]) => (
    <Field
      key={name}
      label={label}
      hint={hint}
      inputMode="decimal"
      autoComplete="off"
      value={draft.numbers[name]}
      error={errors[name]}
      onChange={(event) => onChange({ ...draft, numbers: { ...draft.numbers, [name]: event.target.value } })}
    />
  )
  const row = 'grid gap-4 sm:grid-cols-3'
  return (
    <div className="flex flex-col gap-5">
      <div className={row}>{engine.map(field)}</div>
      <Checkbox
        label="Boosted by a turbocharger or supercharger"
        checked={draft.boosted}
        onChange={(event) => onChange({ ...draft, boosted: event.target.checked })}
      />
      <div className={row}>{injectors.map(field)}</div>
      <div className={row}>
        <Select
          label="Fuel"
          hint="Sets the two values beside; change them if you know better"
          value={draft.fuel}
          onChange={(event) => {
            const fuel = event.target.value as EngineSheetInput['fuel']
            if (fuel === 'custom') onChange({ ...draft, fuel })
            else {
              const { stoichAfr, densityGPerCc } = fuels[fuel]
              onChange({
                ...draft,
                fuel,
                numbers: {
                  ...draft.numbers,
                  stoichAfr: stoichAfr.toFixed(2),
                  fuelDensityGPerCc: densityGPerCc.toFixed(3),
                },
              })
            }
          }}
        >
          {Object.entries(fuels).map(([id, { name }]) => (
            <option key={id} value={id}>
              {name}
            </option>
          ))}
          <option value="custom">Another fuel</option>
        </Select>
        {field(['stoichAfr', 'Stoichiometric ratio', 'kg of air to 1 kg of fuel'])}
        {field(['fuelDensityGPerCc', 'Fuel density', 'g/cc'])}
      </div>
      <div className={row}>{sensor.map(field)}</div>
    </div>
  )
}
