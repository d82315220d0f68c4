import { useState } from 'react';
import { View } from 'react-native';
import { router } from 'expo-router';
import type { Href } from 'expo-router';
import type { StationSummary } from '../../server/contract/api';
import { newId } from '../data/new-id';
import { useLayouts } from '../data/use-layouts';
import { useMay } from '../data/use-me';
import { useRawFiles, useReadingShares } from '../data/use-raw-files';
import { useRuns } from '../data/use-runs';
import { useClock } from '../format/useClock';
import { Button, ErrorNotice, LoadingLine, PageBody, PageHead, Section } from '../primitives';
import { proposalOf } from '../raw-files/chosen-file';
import type { ChosenFile } from '../raw-files/chosen-file';
import { spansOf } from '../raw-files/coverage';
import { CoverageStrip } from '../raw-files/CoverageStrip';
import { readBeginning } from '../raw-files/file-beginning';
import { FilePicker } from '../raw-files/FilePicker';
import type { LayoutDraft } from '../raw-files/layout-draft';
import { Proposal } from '../raw-files/Proposal';
import { RawFileList } from '../raw-files/RawFileList';
import { UploadList } from '../raw-files/UploadList';
import { useUploads } from '../raw-files/use-uploads';
import { StartRunSheet } from '../runs/StartRunSheet';
import { stationPath } from '../shell';
import { useWide } from '../tokens';
import { StationPage } from './StationPage';

/** Bring raw files in, see how they read, and what is here already. */
export function RawFilesScreen({ group, station }: { group: string; station: string }) {
  const [isComputeOpen, setIsComputeOpen] = useState(false);
  const mayStart = useMay(group, 'run.start');
  return (
    <StationPage
      group={group}
      station={station}
      place="raw-files"
      title="Raw files"
      actions={
        mayStart
          ? [{ key: 'compute', label: 'Compute', icon: 'forward', onPress: () => setIsComputeOpen(true) }]
          : []
      }
      offlineText="Files can be looked at, and are sent when the network is back."
    >
      {(summary) => (
        <>
          <RawFilesPage
            key={summary.id}
            group={group}
            summary={summary}
            onCompute={() => setIsComputeOpen(true)}
            mayStart={mayStart}
          />
          {isComputeOpen ? (
            <StartRunSheet
              open
              group={group}
              summary={summary}
              onClose={() => setIsComputeOpen(false)}
              onStarted={() => router.push(stationPath(group, station, 'runs') as Href)}
            />
          ) : null}
        </>
      )}
    </StationPage>
  );
}

interface PageProps {
  group: string;
  summary: StationSummary;
  onCompute: () => void;
  mayStart: boolean;
}

function RawFilesPage({ group, summary, onCompute, mayStart }: PageProps) {
  const { slug, utcOffsetMinutes } = summary.station;
  const wide = useWide();
  const clock = useClock(utcOffsetMinutes);
  const files = useRawFiles(group, slug);
  const layouts = useLayouts(group, slug);
  const runs = useRuns(group, slug);
  const { queue, items } = useUploads(group, slug);
  const readingShares = useReadingShares(group);
  const mayUpload = useMay(group, 'rawFile.upload');
  const mayWithdraw = useMay(group, 'rawFile.withdraw');
  const mayDownload = useMay(group, 'rawFile.download');

  const [chosen, setChosen] = useState<ChosenFile[]>([]);
  const [draft, setDraft] = useState<LayoutDraft | null>(null);
  const [isLooking, setIsLooking] = useState(false);

  const look = async (list: File[]): Promise<void> => {
    setIsLooking(true);
    const sorted = [...list].sort((a, b) => a.name.localeCompare(b.name, 'en', { numeric: true }));
    const read: ChosenFile[] = [];
    for (const file of sorted) read.push({ id: newId(), file, beginning: await readBeginning(file) });
    setChosen((before) => [...before, ...read]);
    const first = read.find((candidate) => candidate.beginning.problem === null);
    if (first && draft === null) setDraft(proposalOf(first, summary, layouts.data ?? []));
    setIsLooking(false);
  };
  const forget = (): void => {
    setChosen([]);
    setDraft(null);
  };

  /** Files that did not fit stay chosen, with a proposal of their own. */
  const keepRest = (sentIds: readonly string[]): void => {
    const rest = chosen.filter((one) => !sentIds.includes(one.id) && one.beginning.problem === null);
    setChosen(rest);
    setDraft(rest[0] ? proposalOf(rest[0], summary, layouts.data ?? []) : null);
  };

  const kept = files.data?.filter((file) => file.state !== 'withdrawn').length ?? 0;
  const title =
    chosen.length > 0
      ? `Look before ${chosen.length === 1 ? 'it is' : 'they are'} sent`
      : kept > 0
        ? 'Raw files'
        : 'Bring in raw files';
  return (
    <View>
      <PageHead
        title={title}
        subtitle="Kept byte for byte; a copy of one already here is recognised and left alone."
        actions={
          wide && mayStart && kept > 0 && chosen.length === 0 ? (
            <Button kind="primary" label="Compute" onPress={onCompute} />
          ) : undefined
        }
      />
      <PageBody>
        {chosen.length === 0 ? (
          <FilePicker
            onFiles={(list) => void look(list)}
            disabledReason={
              mayUpload
                ? layouts.isPending
                  ? 'Reading saved layouts …'
                  : undefined
                : 'Bringing files in is for leads, analysts and technicians.'
            }
          />
        ) : null}
        {isLooking ? <LoadingLine label="looking at the first lines" /> : null}
        {chosen.length > 0 && !isLooking ? (
          <Proposal
            group={group}
            summary={summary}
            chosen={chosen}
            draft={draft}
            onDraft={setDraft}
            onForget={forget}
            onMore={(list) => void look(list)}
            onDrop={(id) => setChosen((before) => before.filter((one) => one.id !== id))}
            onSent={keepRest}
            kept={spansOf(files.data ?? [])}
            mayStart={mayStart}
          />
        ) : null}
        <UploadList queue={queue} items={items} readingShares={readingShares} />
        {files.isPending ? <LoadingLine label="reading the list of raw files" /> : null}
        {files.error ? (
          <ErrorNotice
            error={files.error}
            safe="The files themselves are safe."
            onRetry={() => void files.refetch()}
          />
        ) : null}
        {files.data && chosen.length === 0 ? (
          <>
            {spansOf(files.data).length > 0 ? (
              <Section title="Where they fall">
                <CoverageStrip kept={spansOf(files.data)} chosen={[]} clock={clock} />
              </Section>
            ) : null}
            <RawFileList
              group={group}
              station={slug}
              files={files.data}
              runs={runs.data ?? []}
              layouts={layouts.data ?? []}
              clock={clock}
              readingShares={readingShares}
              mayWithdraw={mayWithdraw}
              mayDownload={mayDownload}
            />
          </>
        ) : null}
      </PageBody>
    </View>
  );
}
