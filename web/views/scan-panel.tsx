import { type Signal, useSignal } from '@preact/signals';
import { useEffect } from 'preact/hooks';
import { asProblem, type Problem } from '../client/request.ts';
import type { ScanRow } from '../client/rows.ts';
import { saveFile } from '../client/save.ts';
import {
  correctScan,
  type HistoryEntry,
  loadHistory,
  loadOriginal,
  loadScan,
  type ScanCorrections,
} from '../client/scans.ts';
import { formatTemperature } from '../format.ts';
import { type CorrectionForm, changesOf, formOf } from '../model/correct-scan.ts';
import type { ScanLane } from '../model/curves.ts';
import { units } from '../state/units.ts';
import { SCAN_STATE_NAMES } from '../words.ts';
import { ProblemNotice } from './notice.tsx';
import { ScanFigure } from './sample-figures.tsx';

/** One scan by itself: its curve where it has one, and what a person may set over sheet and file. */
export function ScanPanel(props: {
  scanId: string;
  row: ScanRow;
  lane?: ScanLane;
  of: readonly string[];
  instruments: readonly string[];
  onCorrected(): void;
}) {
  const { scanId, row, lane, of, instruments, onCorrected } = props;
  const moved = useSignal<[number, number] | undefined>(undefined);
  return (
    <div class="scan-panel">
      {lane ? (
        <ScanFigure lane={lane} of={of} instruments={instruments} moved={moved} />
      ) : (
        <>
          <h3>{row.file.split('/').at(-1)}</h3>
          <p>
            {SCAN_STATE_NAMES[row.status]}
            {row.reason && `: ${row.reason}`}
          </p>
        </>
      )}
      <Corrections scanId={scanId} row={row} moved={moved} onCorrected={onCorrected} />
    </div>
  );
}

function Corrections(props: {
  scanId: string;
  row: ScanRow;
  moved: Signal<[number, number] | undefined>;
  onCorrected(): void;
}) {
  const { scanId, row, moved, onCorrected } = props;
  const standing = useSignal<ScanCorrections>({});
  const history = useSignal<HistoryEntry[]>([]);
  const form = useSignal<CorrectionForm>(formOf({}));
  const problem = useSignal<Problem | undefined>(undefined);
  const words = useSignal('');
  const busy = useSignal(false);
  const load = async (signal?: AbortSignal): Promise<void> => {
    const [scan, entries] = await Promise.all([loadScan(scanId, signal), loadHistory(scanId, signal)]);
    standing.value = scan.corrections;
    form.value = formOf(scan.corrections);
    history.value = entries;
  };
  useEffect(() => {
    const abort = new AbortController();
    load(abort.signal).catch((error) => {
      if (!abort.signal.aborted) problem.value = asProblem(error);
    });
    return () => abort.abort();
  }, [scanId]);

  const wanted = (): CorrectionForm => (moved.value ? { ...form.value, limitsK: moved.value } : form.value);
  const changes = changesOf(wanted(), standing.value);
  const send = async (body: ScanCorrections): Promise<void> => {
    busy.value = true;
    problem.value = undefined;
    words.value = '';
    try {
      await correctScan(scanId, body);
      moved.value = undefined;
      await load();
      words.value = 'Taken. The scan and what depends on it are computed again.';
      onCorrected();
    } catch (error) {
      problem.value = asProblem(error);
    } finally {
      busy.value = false;
    }
  };
  const set = (change: Partial<CorrectionForm>): void => {
    form.value = { ...form.value, ...change };
  };
  const saveOriginal = async (): Promise<void> => {
    try {
      const name = row.file.split('/').at(-1) ?? 'scan';
      const extension = /\.([^.]+)$/.exec(name)?.[1] ?? 'txt';
      saveFile(await loadOriginal(scanId), [name.replace(/\.[^.]+$/, '')], extension);
    } catch (error) {
      problem.value = asProblem(error);
    }
  };
  const corrected = Object.keys(standing.value) as (keyof ScanCorrections)[];
  return (
    <form
      class="corrections"
      aria-label="Corrections of this scan"
      onSubmit={(event) => {
        event.preventDefault();
        void send(changes);
      }}
    >
      <fieldset>
        <legend>Exotherm in the file</legend>
        {(['sheet', 'up', 'down'] as const).map((direction) => (
          <label key={direction}>
            <input
              type="radio"
              name={`exotherm-${scanId}`}
              checked={form.value.exotherm === direction}
              onChange={() => set({ exotherm: direction })}
            />
            {direction === 'sheet' ? 'as sheet or file say' : direction}
          </label>
        ))}
      </fieldset>
      <label class="ask-field">
        Mass, mg
        <input
          type="number"
          step="any"
          min="0"
          placeholder={row.mass_mg === null ? 'not known' : String(row.mass_mg)}
          value={form.value.massMg}
          onInput={(event) => set({ massMg: event.currentTarget.value })}
        />
      </label>
      <label class="exclude">
        <input
          type="checkbox"
          checked={form.value.isExcluded}
          onChange={(event) => set({ isExcluded: event.currentTarget.checked })}
        />
        Leave this scan out
      </label>
      {form.value.isExcluded && (
        <label class="ask-field reason-field">
          Reason
          <input
            type="text"
            required
            maxLength={1000}
            value={form.value.reason}
            onInput={(event) => set({ reason: event.currentTarget.value })}
          />
        </label>
      )}
      <p class="limits-words" aria-live="polite">
        {moved.value
          ? `Limits moved to ${moved.value.map((limit) => formatTemperature(limit, units.value)).join(' and ')}.`
          : form.value.limitsK &&
            `Limits set by hand: ${form.value.limitsK.map((limit) => formatTemperature(limit, units.value)).join(' and ')}.`}
      </p>
      <p class="correction-buttons">
        <button type="submit" disabled={busy.value || Object.keys(changes).length === 0}>
          Apply
        </button>
        {moved.value && (
          <button
            type="button"
            class="quiet"
            onClick={() => {
              moved.value = undefined;
            }}
          >
            Put the limits back
          </button>
        )}
        {corrected.length > 0 && (
          <button
            type="button"
            class="quiet"
            disabled={busy.value}
            onClick={() => send(Object.fromEntries(corrected.map((field) => [field, null])))}
          >
            Take every correction back
          </button>
        )}
        <button type="button" class="quiet" onClick={saveOriginal}>
          Save the file as it came
        </button>
      </p>
      <p role="status">{words.value}</p>
      {problem.value && <ProblemNotice problem={problem.value} />}
      {history.value.length > 0 && <History entries={history.value} />}
    </form>
  );
}

const CAUSES = { correction: 'by hand', sheet: 'by a later sheet' };

function History({ entries }: { entries: readonly HistoryEntry[] }) {
  const show = (value: HistoryEntry['after']): string => (value === null ? 'nothing' : [value].flat().join(' to '));
  return (
    <details class="small">
      <summary>What was corrected before</summary>
      <ul>
        {entries.map((entry) => (
          <li key={`${entry.at} ${entry.field}`}>
            {entry.field.replaceAll('_', ' ')}: {show(entry.before)} → {show(entry.after)}, {CAUSES[entry.cause]},{' '}
            {entry.at.slice(0, 16).replace('T', ' ')} UTC
          </li>
        ))}
      </ul>
    </details>
  );
}
