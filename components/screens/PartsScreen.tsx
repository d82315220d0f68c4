import { useState } from 'react';
import { View } from 'react-native';
import { useForm } from 'react-hook-form';
import type { ReactNode } from 'react';
import { AppShell } from '../shell/AppShell';
import { Button, ButtonRow } from '../primitives/Button';
import { ConfirmSheet } from '../primitives/ConfirmSheet';
import { DataTable } from '../primitives/DataTable';
import { EmptyState } from '../primitives/EmptyState';
import { CheckField, ChoiceField, NumberField, SegmentChoice, TextField } from '../primitives/Field';
import { GradeMark, RuledGrade } from '../primitives/GradeMark';
import type { GradeMarkSize } from '../primitives/GradeMark';
import { GradeShares } from '../primitives/GradeShares';
import { HashText } from '../primitives/HashText';
import { Icon } from '../primitives/Icon';
import { IconButton } from '../primitives/IconButton';
import { LimitBar } from '../primitives/LimitBar';
import { LoadingLine } from '../primitives/LoadingLine';
import { Notice } from '../primitives/Notice';
import { ProgressLine } from '../primitives/ProgressLine';
import { ReasonCard } from '../primitives/ReasonCard';
import { Rule } from '../primitives/Rule';
import { PageBody, PageHead, Panel, Section } from '../primitives/Section';
import { Text } from '../primitives/Text';
import { TextLink } from '../primitives/TextLink';
import { UnitText } from '../primitives/UnitText';
import { FactRow, Ledger, ValueRow } from '../primitives/ValueRow';
import { gradeOrder, space, useTheme, useWide } from '../tokens';

const exampleHash = '7c1f90ab52d8e6340c9b17fa6e21d5380b4f7a96ce135d2078e94bfa6c01d7e3';

/** All parts with their states, to be looked at; every value here is an example. */
export function PartsScreen() {
  return (
    <AppShell
      title="Parts"
      isGuest
      phoneTitle="Parts"
      stationOffsetMinutes={60}
      chip="every value here is an example"
      actions={[
        { key: 'evidence', label: 'Evidence', icon: 'evidence', isOn: true, onPress: () => undefined },
        { key: 'note', label: 'Note', icon: 'note', onPress: () => undefined },
        { key: 'again', label: 'Check again', icon: 'again', isPrimary: true, onPress: () => undefined },
      ]}
    >
      <PageHead title="Parts and their states" subtitle="For those who build screens" />
      <PageBody>
        <Part title="Text">
          <Cell label="roles">
            <Text variant="verdict" level={0}>
              FC 12:30–13:00 graded 2
            </Text>
            <Text variant="section" level={0}>
              Section
            </Text>
            <Text variant="part" level={0}>
              Part
            </Text>
            <Text>Text, 15 px, for reading.</Text>
            <Text variant="small" soft>
              Small and soft, for what stands beside.
            </Text>
            <Text variant="label">Label</Text>
            <Text variant="figure">−12.2 ± 1.9</Text>
          </Cell>
          <Cell label="raised and lowered">
            <Text>
              <UnitText>µmol m-2 s-1</UnitText>
            </Text>
            <Text>
              <UnitText>W m-2, m s-1, mol mol-1, kg m-3, m2 s-2</UnitText>
            </Text>
            <Text>
              <UnitText>CO2, H2O, CH4 and N2O</UnitText>
            </Text>
            <Text>σ, τ, θ, u*</Text>
            <Text variant="figure" struck soft>
              −10.8
            </Text>
          </Cell>
          <Cell label="links">
            <Text>
              In a sentence: <TextLink label="the evidence" href="/parts" /> of a value.
            </Text>
            <TextLink label="Plan a visit" href="/parts" standing />
          </Cell>
        </Part>

        <Part title="Grade mark">
          <Cell label="four shapes">
            <Row>
              {gradeOrder.map((grade) => (
                <GradeMark key={String(grade)} grade={grade} show="both" />
              ))}
            </Row>
          </Cell>
          <Cell label="9, 14, 18, 22 px">
            <Row>
              {([9, 14, 18, 22] as const satisfies readonly GradeMarkSize[]).map((size) => (
                <Row key={size} tight>
                  {gradeOrder.map((grade) => (
                    <GradeMark key={String(grade)} grade={grade} size={size} show="none" />
                  ))}
                </Row>
              ))}
            </Row>
          </Cell>
          <Cell label="overruled">
            <RuledGrade computed={2} ruled={1} />
            <Text variant="small" soft>
              The first grade stays in sight.
            </Text>
          </Cell>
          <Cell label="counts">
            <Row>
              <GradeMark grade={0} show="word" count="131" />
              <GradeMark grade={1} show="word" count="24" />
              <GradeMark grade={2} show="word" count="26" />
              <GradeMark grade={null} show="word" count="11" />
            </Row>
          </Cell>
        </Part>

        <Part title="Limit bar">
          <Cell label="within">
            <LimitBar label="Steady-state deviation" value={12} unit="%" grade={0} softHigh={30} />
          </Cell>
          <Cell label="beyond, with the parent's limit">
            <LimitBar
              label="Steady-state deviation"
              value={47}
              unit="%"
              grade={2}
              hardHigh={30}
              parentLimit={100}
            />
          </Cell>
          <Cell label="two limits">
            <LimitBar
              label="Steady-state deviation"
              value={47}
              unit="%"
              grade={1}
              softHigh={30}
              hardHigh={100}
            />
          </Cell>
          <Cell label="two-sided">
            <LimitBar
              label="Sonic minus air temperature"
              value={0.4}
              unit="K"
              decimals={1}
              grade={0}
              softLow={-2}
              softHigh={2}
              limitText="−2.0 to 2.0"
            />
          </Cell>
          <Cell label="at least">
            <LimitBar
              label="Rows present"
              value={99.8}
              unit="%"
              decimals={1}
              grade={0}
              hardLow={90}
              from={60}
              to={100}
            />
          </Cell>
          <Cell label="unusual">
            <LimitBar label="Slow share of covariance" value={34} unit="%" grade={1} softHigh={15} usual />
          </Cell>
          <Cell label="far beyond">
            <LimitBar
              label="Steady-state deviation"
              value={1240}
              unit="%"
              grade={2}
              softHigh={30}
              hardHigh={100}
            />
          </Cell>
          <Cell label="no value">
            <LimitBar label="Steady-state deviation" value={null} unit="%" grade={null} softHigh={30} />
          </Cell>
        </Part>

        <Part title="Reason card">
          <Cell label="beyond a limit, decides">
            <ReasonCard
              grade={2}
              decides
              finding="Steady-state deviation 47 %"
              sentence="The six 5-minute covariances average −10.8; the half hour as a whole gives −20.4."
              limit={{
                label: 'Steady-state deviation',
                value: 47,
                unit: '%',
                grade: 2,
                hardHigh: 30,
                parentLimit: 100,
              }}
            />
          </Cell>
          <Cell label="within limits">
            <ReasonCard grade={0} finding="Five other tests within limits" />
          </Cell>
          <Cell label="a ruling on top">
            <ReasonCard
              grade={1}
              isRuling
              finding="Ruled 1 by R. Ashdene"
              sentence="“Mowing is real exchange here; keep for sums.” 19 June 2027. The computed grade was 2."
            />
          </Cell>
        </Part>

        <Part title="Ledger row">
          <Cell label="value rows" wide>
            <Ledger label="Fluxes of the period">
              <ValueRow
                label="FC"
                value={-12.2}
                uncertainty={1.9}
                unit="µmol m-2 s-1"
                grade={2}
                href="/parts"
              />
              <ValueRow
                label="LE"
                value={281}
                decimals={0}
                uncertainty={25}
                unit="W m-2"
                grade={0}
                href="/parts"
              />
              <ValueRow label="H" value={null} unit="W m-2" grade={null} />
              <ValueRow
                label="u*"
                value={0.34}
                formerValue={0.31}
                decimals={2}
                uncertainty={0.03}
                unit="m s-1"
                grade={1}
              />
            </Ledger>
          </Cell>
          <Cell label="facts" wide>
            <View>
              <FactRow label="Sonic height">3.2 m</FactRow>
              <FactRow label="Recipe">
                <HashText hash={exampleHash} of="recipe" />
              </FactRow>
            </View>
          </Cell>
          <Cell label="shares">
            <GradeShares
              label="FC, last 30 days"
              counts={{ good: 62, usable: 15, rejected: 18, missing: 5 }}
            />
            <GradeShares
              label="LE, last 30 days"
              counts={{ good: 29, usable: 14, rejected: 15, missing: 42 }}
            />
            <GradeShares label="H, last 30 days" counts={{ good: 0, usable: 0, rejected: 0, missing: 30 }} />
          </Cell>
        </Part>

        <Part title="States">
          <Cell label="empty">
            <EmptyState title="No raw files yet." action={<Button label="Bring in records" />}>
              Bring in a day from the logger’s card to see whether the layout fits.
            </EmptyState>
          </Cell>
          <Cell label="loading">
            <LoadingLine label="Reading June" />
          </Cell>
          <Cell label="progress">
            <ProgressLine label="Computing run 42" done={1210} total={12480} unit="periods" />
          </Cell>
          <Cell label="error" wide>
            <Notice
              kind="error"
              title="These values could not be read."
              safe="Records and run 41 are safe."
              next="Try again in a minute."
              code="7F3A"
              action={{ label: 'Try again', onPress: () => undefined }}
            />
          </Cell>
          <Cell label="offline, info, done" wide>
            <Notice
              kind="offline"
              title="No network."
              safe="Checked on this device; kept here and sent later."
            />
            <Notice kind="info" title="Run 12 is stale: set-up 4 was corrected after it." />
            <Notice kind="done" title="48 periods computed." />
          </Cell>
        </Part>

        <Part title="Buttons and sheets">
          <ButtonParts />
        </Part>

        <Part title="Fields">
          <FieldParts />
        </Part>

        <Part title="Table and panel">
          <Cell label="table" wide>
            <DataTable
              caption="Tests of the period"
              rows={[
                { test: 'Rows present', found: '99.8 %', limit: '90 %', grade: 0 as const },
                { test: 'Steady state', found: '47 %', limit: '30 %', grade: 2 as const },
              ]}
              rowKey={(row) => row.test}
              columns={[
                { key: 'test', head: 'Test', cell: (row) => <Text variant="label">{row.test}</Text> },
                { key: 'found', head: 'Found', align: 'right', cell: (row) => row.found },
                { key: 'limit', head: 'Limit', align: 'right', cell: (row) => row.limit, wideOnly: true },
                { key: 'grade', head: 'Grade', cell: (row) => <GradeMark grade={row.grade} show="both" /> },
              ]}
            />
          </Cell>
          <Cell label="panel">
            <Panel>
              <Text variant="part" level={0}>
                Quillet Wood
              </Text>
              <Text variant="small" soft>
                Set-up 1, no raw files yet.
              </Text>
              <Button label="Bring in records" />
            </Panel>
          </Cell>
          <Cell label="rules">
            <Rule />
            <Rule faint />
            <Rule double />
          </Cell>
        </Part>
      </PageBody>
    </AppShell>
  );
}

function ButtonParts() {
  const [isOpen, setIsOpen] = useState(false);
  const [detrend, setDetrend] = useState<string>('linear');
  return (
    <>
      <Cell label="rest, first, quiet, off, busy" wide>
        <ButtonRow>
          <Button label="Rule on grade" />
          <Button label="Open evidence" kind="primary" />
          <Button label="Put back" kind="quiet" />
          <Button label="Seal" disabledReason="Only a lead can seal." />
          <Button label="Compute" busy busyLabel="Computing" />
          <Button label="Check" icon={<Icon name="check" />} />
        </ButtonRow>
      </Cell>
      <Cell label="with icon only">
        <Row tight>
          <IconButton label="Earlier" icon={<Icon name="back" />} onPress={() => undefined} />
          <IconButton label="Later" icon={<Icon name="forward" />} onPress={() => undefined} />
          <IconButton label="Wider" icon={<Icon name="minus" />} onPress={() => undefined} />
          <IconButton label="Closer" icon={<Icon name="plus" />} onPress={() => undefined} disabled />
        </Row>
      </Cell>
      <Cell label="sheet">
        <Button label="Withdraw a raw file" onPress={() => setIsOpen(true)} />
        <ConfirmSheet
          open={isOpen}
          title="Withdraw this raw file?"
          confirmLabel="Withdraw"
          onConfirm={() => setIsOpen(false)}
          onClose={() => setIsOpen(false)}
        >
          Its bytes stay kept and it can be brought back. Runs that used it are marked stale.
        </ConfirmSheet>
      </Cell>
      <Cell label="chosen, was, free" wide>
        <SegmentChoice
          label="Detrend"
          value={detrend}
          was="block"
          onChange={setDetrend}
          options={[
            { value: 'block', label: 'block mean' },
            { value: 'linear', label: 'linear' },
            { value: 'running', label: 'running mean' },
          ]}
        />
      </Cell>
    </>
  );
}

interface ExampleForm {
  name: string;
  azimuthDeg: number | null;
  clock: string;
  isInvented: boolean;
}

function FieldParts() {
  const form = useForm<ExampleForm>({
    defaultValues: { name: 'Hollin Fen', azimuthDeg: 221.5, clock: '', isInvented: true },
    errors: { clock: { type: 'required', message: 'Say what a stamp means.' } },
  });
  return (
    <>
      <Cell label="text">
        <TextField control={form.control} name="name" label="Name of the station" />
      </Cell>
      <Cell label="number">
        <NumberField
          control={form.control}
          name="azimuthDeg"
          label="Boom azimuth"
          unit="°"
          help="Where the boom points, from mast to sonic. Ten degrees off turns the wind roses of years."
        />
      </Cell>
      <Cell label="choice, with an error">
        <ChoiceField
          control={form.control}
          name="clock"
          label="A stamp marks"
          options={[
            { value: 'start', label: 'the start of the scan' },
            { value: 'end', label: 'the end of the scan' },
          ]}
        />
      </Cell>
      <Cell label="check">
        <CheckField
          control={form.control}
          name="isInvented"
          label="Invented records"
          help="Shown wherever the station is."
        />
      </Cell>
    </>
  );
}

function Part({ title, children }: { title: string; children: ReactNode }) {
  const wide = useWide();
  return (
    <Section title={title}>
      <View
        style={{ flexDirection: wide ? 'row' : 'column', flexWrap: 'wrap', columnGap: 36, rowGap: space.xl }}
      >
        {children}
      </View>
    </Section>
  );
}

function Cell({
  label,
  wide: isBroad = false,
  children,
}: {
  label: string;
  wide?: boolean;
  children: ReactNode;
}) {
  const wide = useWide();
  const { colour } = useTheme();
  return (
    <View style={{ width: wide ? (isBroad ? 460 : 280) : '100%', gap: space.s }}>
      <Text variant="label" colour={colour.inkSoft}>
        {label}
      </Text>
      {children}
    </View>
  );
}

function Row({ children, tight = false }: { children: ReactNode; tight?: boolean }) {
  return (
    <View style={{ flexDirection: 'row', flexWrap: 'wrap', gap: tight ? 5 : 18, alignItems: 'center' }}>
      {children}
    </View>
  );
}
