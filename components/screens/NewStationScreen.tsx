import { useState } from 'react';
import { View } from 'react-native';
import { router } from 'expo-router';
import type { Href } from 'expo-router';
import { Controller, useForm } from 'react-hook-form';
import type { Control } from 'react-hook-form';
import { zodResolver } from '@hookform/resolvers/zod';
import { newId } from '../data/new-id';
import { useMay } from '../data/use-me';
import { useCreateStation } from '../data/use-stations';
import { formatOffset } from '../format/times';
import {
  Button,
  ButtonRow,
  ChoiceInput,
  EmptyState,
  ErrorNotice,
  Notice,
  PageBody,
  PageHead,
  Section,
  Text,
  TextField,
  TextInput,
} from '../primitives';
import { SafetyNotice } from '../set-up/SafetyNotice';
import { SetUpForm } from '../set-up/SetUpForm';
import { emptySetUp, slugOf } from '../set-up/set-up-fields';
import { newStationFormSchema, formWords } from '../set-up/station-form';
import type { StationFormInput, StationFormOutput } from '../set-up/station-form';
import { AppShell, groupPath, stationPath } from '../shell';
import { space, useWide } from '../tokens';

const offsets = Array.from({ length: 53 }, (_, index) => -720 + index * 30);

/** A station with its mast, its instruments and where they point. */
export function NewStationScreen({ group }: { group: string }) {
  const wide = useWide();
  const mayCreate = useMay(group, 'station.create');
  const create = useCreateStation(group);
  const [ids] = useState(() => ({ id: newId(), systemId: newId(), setUpId: newId() }));
  const [ownSlug, setOwnSlug] = useState(false);
  const form = useForm<StationFormInput, unknown, StationFormOutput>({
    resolver: zodResolver(newStationFormSchema, formWords),
    mode: 'onTouched',
    defaultValues: {
      station: {
        schema: 'gustbook/station/1',
        name: '',
        slug: '',
        description: '',
        utcOffsetMinutes: 0,
        invented: false,
      },
      setUp: emptySetUp(`${new Date().toISOString().slice(0, 10)}T00:00:00Z`),
      why: '',
    },
  });
  const { control, handleSubmit, setValue, formState } = form;
  const plain = control as unknown as Control<StationFormInput>;
  const submit = handleSubmit(({ station, setUp }) =>
    create.mutate(
      { ...ids, station, setUp },
      {
        onSuccess: (summary) => router.replace(stationPath(group, summary.station.slug, 'raw-files') as Href),
      },
    ),
  );
  const cell = { width: wide ? 340 : ('100%' as const) };
  return (
    <AppShell
      title="New station"
      groupSlug={group}
      place="stations"
      phoneTitle="New station"
      actions={
        mayCreate
          ? [{ key: 'save', label: 'Save', icon: 'check', isPrimary: true, onPress: () => void submit() }]
          : []
      }
    >
      <PageHead
        title="New station"
        subtitle="Where it stands, what it carries and where that points. All of it can be corrected later; corrections keep the old."
      />
      <PageBody maxWidth={1180}>
        {mayCreate ? (
          <View style={{ gap: space.xl }}>
            <SafetyNotice />
            <Section title="Name">
              <View
                style={{
                  flexDirection: wide ? 'row' : 'column',
                  flexWrap: 'wrap',
                  gap: space.l,
                  alignItems: 'flex-start',
                }}
              >
                <View style={cell}>
                  <Controller
                    control={control}
                    name="station.name"
                    render={({ field, fieldState }) => (
                      <TextInput
                        label="Name"
                        value={field.value}
                        onBlur={field.onBlur}
                        inputRef={field.ref}
                        error={fieldState.error ? 'Give the station a name.' : undefined}
                        onChange={(name) => {
                          field.onChange(name);
                          if (!ownSlug)
                            setValue('station.slug', slugOf(name), { shouldValidate: formState.isSubmitted });
                        }}
                      />
                    )}
                  />
                </View>
                <View style={cell}>
                  <Controller
                    control={control}
                    name="station.slug"
                    render={({ field, fieldState }) => (
                      <TextInput
                        label="Short form"
                        figure
                        value={field.value}
                        onBlur={field.onBlur}
                        inputRef={field.ref}
                        error={fieldState.error?.message}
                        help="In addresses and file names; stays for good."
                        onChange={(slug) => {
                          setOwnSlug(true);
                          field.onChange(slug);
                        }}
                      />
                    )}
                  />
                </View>
                <View style={cell}>
                  <Controller
                    control={control}
                    name="station.utcOffsetMinutes"
                    render={({ field }) => (
                      <ChoiceInput
                        label="Station standard time"
                        value={String(field.value)}
                        options={offsets.map((offset) => ({
                          value: String(offset),
                          label: formatOffset(offset),
                        }))}
                        onChange={(value) => field.onChange(Number(value))}
                        help="Without daylight saving, all year. Half hours are anchored to it, and it stays for good."
                      />
                    )}
                  />
                </View>
                <View style={cell}>
                  <TextField
                    control={plain}
                    name="station.description"
                    label="What the place is"
                    optional
                    lines={2}
                    help="Fen meadow, sown grass, beech: a line for those who were never there."
                  />
                </View>
              </View>
            </Section>
            <SetUpForm control={control} setValue={setValue} />
            {formState.isSubmitted && !formState.isValid ? (
              <Notice
                kind="error"
                title="Some fields are missing or out of range."
                next="They are marked above; the first of them has the cursor."
              />
            ) : null}
            {create.error ? <ErrorNotice error={create.error} safe="What you wrote is still here." /> : null}
            <ButtonRow>
              <Button
                kind="primary"
                label="Make the station"
                busy={create.isPending}
                busyLabel="Saving"
                onPress={() => void submit()}
              />
              <Button label="Leave it" href={groupPath(group)} />
            </ButtonRow>
          </View>
        ) : (
          <EmptyState
            title="New stations are made by leads, analysts and technicians."
            action={<Button label="All stations" href={groupPath(group)} />}
          >
            <Text soft>Ask one of them, or look at the stations that are here.</Text>
          </EmptyState>
        )}
      </PageBody>
    </AppShell>
  );
}
