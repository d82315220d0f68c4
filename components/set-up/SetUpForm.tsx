import { View } from 'react-native';
import type { ReactNode } from 'react';
import { Controller, useFieldArray, useFormState, useWatch } from 'react-hook-form';
import type { Control, FieldPath, UseFormSetValue } from 'react-hook-form';
import { suggestDisplacementM, suggestRoughnessM } from '../../processing/schemas/set-up';
import { formatOffset } from '../format/times';
import {
  Button,
  ChoiceField,
  NumberField,
  Section,
  SegmentChoice,
  SegmentField,
  Text,
  TextField,
  TextInput,
} from '../primitives';
import { space, useTheme, useWide } from '../tokens';
import { CompassDrawing } from './CompassDrawing';
import { setUpGroups } from './set-up-fields';
import type { SetUpFieldText } from './set-up-fields';
import { isoOf, localOf } from './station-form';
import type { StationFormInput, StationFormOutput } from './station-form';

type FormControl = Control<StationFormInput, unknown, StationFormOutput>;

export interface SetUpFormProps {
  control: FormControl;
  setValue: UseFormSetValue<StationFormInput>;
}

/** All fields of a set-up, each with its unit and why it matters; the boom drawn beside. */
export function SetUpForm({ control, setValue }: SetUpFormProps) {
  const wide = useWide();
  const setUp = useWatch({ control, name: 'setUp' });
  const offset = useWatch({ control, name: 'station.utcOffsetMinutes' });
  return (
    <View style={{ gap: space.xl }}>
      <Section title="From when">
        <Grid>
          <Cell>
            <Controller
              control={control}
              name="setUp.validFrom"
              render={({ field, fieldState }) => (
                <TextInput
                  type="datetime-local"
                  label={`Holds from (${formatOffset(offset)})`}
                  value={localOf(field.value, offset)}
                  onChange={(value) => field.onChange(isoOf(value, offset))}
                  onBlur={field.onBlur}
                  error={fieldState.error ? 'Write a day and a time.' : undefined}
                  help="The first instant that the station stood like this. The half hour it falls into has no result."
                />
              )}
            />
          </Cell>
        </Grid>
      </Section>
      {setUpGroups.map((group) => (
        <Section key={group.key} title={group.title} subtitle={group.intro}>
          <View style={{ flexDirection: wide ? 'row' : 'column', gap: space.xl, alignItems: 'flex-start' }}>
            <View style={{ flex: wide ? 1 : undefined, alignSelf: 'stretch', minWidth: 0 }}>
              <Grid>
                {group.fields.map((field) => (
                  <Cell key={field.path}>
                    <SetUpField control={control} field={field} />
                    {field.path === 'displacementM' || field.path === 'roughnessM' ? (
                      <Suggestion
                        canopyM={setUp.canopyHeightM}
                        value={setUp[field.path]}
                        suggested={field.path === 'displacementM' ? suggestDisplacementM : suggestRoughnessM}
                        onTake={(value) =>
                          setValue(`setUp.${field.path}` as 'setUp.displacementM', value, {
                            shouldDirty: true,
                            shouldValidate: true,
                          })
                        }
                      />
                    ) : null}
                  </Cell>
                ))}
              </Grid>
            </View>
            {group.key === 'directions' ? <CompassDrawing geometry={setUp} /> : null}
          </View>
          {group.key === 'directions' ? <Sectors control={control} /> : null}
        </Section>
      ))}
    </View>
  );
}

function Grid({ children }: { children: ReactNode }) {
  const wide = useWide();
  return (
    <View
      style={{
        flexDirection: wide ? 'row' : 'column',
        flexWrap: 'wrap',
        gap: space.l,
        rowGap: space.l,
        alignItems: 'flex-start',
      }}
    >
      {children}
    </View>
  );
}

function Cell({ children }: { children: ReactNode }) {
  const wide = useWide();
  return <View style={{ width: wide ? 264 : '100%', gap: 4 }}>{children}</View>;
}

function SetUpField({ control, field }: { control: FormControl; field: SetUpFieldText }) {
  const name = `setUp.${field.path}` as FieldPath<StationFormInput>;
  const common = {
    control: control as unknown as Control<StationFormInput>,
    name,
    label: field.label,
    help: field.why,
  };
  if (field.kind === 'number')
    return <NumberField {...common} unit={field.unit} optional={field.isOptional} />;
  if (field.kind === 'text') return <TextField {...common} figure optional />;
  const options = field.choices ?? [];
  const isShort = options.length === 2 && options.every((option) => option.label.length < 16);
  return isShort ? (
    <SegmentField {...common} options={options} />
  ) : (
    <ChoiceField {...common} options={options} />
  );
}

/** A value that follows from the canopy, offered and never forced. */
function Suggestion(props: {
  canopyM: number;
  value: number;
  suggested: (canopyM: number) => number;
  onTake: (value: number) => void;
}) {
  if (!Number.isFinite(props.canopyM) || props.canopyM === null) return null;
  const suggested = props.suggested(props.canopyM);
  if (suggested === props.value) {
    return (
      <Text variant="small" soft>
        As the canopy suggests.
      </Text>
    );
  }
  return (
    <Button
      kind="quiet"
      label={`Take ${suggested} m, from the canopy`}
      onPress={() => props.onTake(suggested)}
    />
  );
}

function Sectors({ control }: { control: FormControl }) {
  const { colour } = useTheme();
  const wide = useWide();
  const { fields, append, remove } = useFieldArray({ control, name: 'setUp.disturbedSectors' });
  const plain = control as unknown as Control<StationFormInput>;
  const { errors } = useFormState({ control });
  return (
    <View style={{ gap: space.m }}>
      <Text variant="label">Other disturbed directions</Text>
      <Text variant="small" soft>
        Buildings, other masts, a road: where the wind must not come from. Clockwise from, to; true north.
      </Text>
      {fields.map((field, index) => (
        <View
          key={field.id}
          role="group"
          aria-label={`Disturbed direction ${index + 1}`}
          style={{
            flexDirection: wide ? 'row' : 'column',
            gap: space.m,
            alignItems: wide ? 'flex-start' : 'stretch',
            borderTopWidth: 1,
            borderTopColor: colour.hair,
            paddingTop: space.m,
          }}
        >
          <View style={{ width: wide ? 110 : '100%' }}>
            <NumberField
              control={plain}
              name={`setUp.disturbedSectors.${index}.fromDeg`}
              label="From"
              unit="°"
            />
          </View>
          <View style={{ width: wide ? 110 : '100%' }}>
            <NumberField control={plain} name={`setUp.disturbedSectors.${index}.toDeg`} label="to" unit="°" />
          </View>
          <View style={{ width: wide ? 240 : '100%' }}>
            <TextField control={plain} name={`setUp.disturbedSectors.${index}.reason`} label="Because of" />
          </View>
          <View style={{ width: wide ? 190 : '100%' }}>
            <Controller
              control={control}
              name={`setUp.disturbedSectors.${index}.grade`}
              render={({ field: grade }) => <SectorGrade value={grade.value} onChange={grade.onChange} />}
            />
          </View>
          <View style={{ paddingTop: wide ? 24 : 0 }}>
            <Button
              kind="quiet"
              label="Take out"
              ariaLabel={`Take out disturbed direction ${index + 1}`}
              onPress={() => remove(index)}
            />
          </View>
        </View>
      ))}
      {errors.setUp?.disturbedSectors?.message ? (
        <Text strong>{errors.setUp.disturbedSectors.message}</Text>
      ) : null}
      <Button
        label="Add a direction"
        onPress={() =>
          append({
            fromDeg: null as unknown as number,
            toDeg: null as unknown as number,
            grade: 2,
            reason: '',
          })
        }
      />
    </View>
  );
}

function SectorGrade({ value, onChange }: { value: 1 | 2; onChange: (value: 1 | 2) => void }) {
  return (
    <SegmentChoice
      label="Fluxes from there are"
      value={String(value) as '1' | '2'}
      options={[
        { value: '1', label: 'usable' },
        { value: '2', label: 'rejected' },
      ]}
      onChange={(next) => onChange(next === '1' ? 1 : 2)}
    />
  );
}
