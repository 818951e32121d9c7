import { useSignal } from '@preact/signals';
import type { ComponentChildren } from 'preact';
import { useRef } from 'preact/hooks';
import { csvCell } from '../../schema/wire/result-tables.ts';
import { saveFigureAsPng, saveFigureAsSvg } from '../client/figure-file.ts';
import { saveFile } from '../client/save.ts';
import { type Curves, curveRows } from '../model/curves.ts';
import { SaveSign } from './download.tsx';
import { useNear } from './use-near.ts';
import { useWidth } from './use-width.ts';

/** A plot with its title, its words and the buttons that save it as SVG, PNG and, where it shows curves, as CSV. */
export function Figure(props: {
  title: string;
  /** Words of the file name, e.g. campaign and sample */
  of: readonly string[];
  curves?: Curves;
  /** Says in words what is drawn */
  caption: ComponentChildren;
  legend?: ComponentChildren;
  tools?: ComponentChildren;
  /** Whether it stands at the top of the page */
  isFirst?: boolean;
  /** Draws the figure at a width in px: one svg element, which may stand within others */
  draw(width: number): ComponentChildren;
}) {
  const { title, of, curves, caption, legend, tools, isFirst, draw } = props;
  const [frame, width] = useWidth<HTMLDivElement>();
  const figure = useRef<HTMLElement>(null);
  const { isNear } = useNear(figure, isFirst);
  // Drawn when it first comes near, and kept: what was seen does not jump.
  const isDrawn = useRef(false);
  isDrawn.current ||= isNear.value;
  const trouble = useSignal('');
  const svg = (): SVGSVGElement | null => figure.current?.querySelector('.figure-frame svg') ?? null;
  const run = (save: (drawn: SVGSVGElement) => void | Promise<void>) => async () => {
    trouble.value = '';
    const drawn = svg();
    try {
      if (drawn) await save(drawn);
    } catch (error) {
      trouble.value = `The picture was not saved: ${error instanceof Error ? error.message : error}.`;
    }
  };
  const name = [...of, title];
  const saveCsv = (shown: Curves) => () => {
    const { columns, rows } = curveRows(shown);
    const lines = [columns.map(csvCell), ...rows.map((row) => columns.map((column) => csvCell(row[column])))];
    saveFile(new Blob([`${lines.map((line) => line.join(',')).join('\n')}\n`], { type: 'text/csv' }), name, 'csv');
  };
  return (
    <figure ref={figure}>
      <div class="figure-head">
        <h3>{title}</h3>
        <div class="downloads">
          <SaveButton title={title} kind="SVG" onClick={run((drawn) => saveFigureAsSvg(drawn, name))} />
          <SaveButton title={title} kind="PNG" onClick={run((drawn) => saveFigureAsPng(drawn, name))} />
          {curves && <SaveButton title={title} kind="CSV" onClick={saveCsv(curves)} />}
        </div>
      </div>
      {tools}
      <div class="figure-frame">
        <div ref={frame} class={isDrawn.current ? undefined : 'figure-to-come'}>
          {width > 0 && isDrawn.current && draw(width)}
        </div>
      </div>
      {legend && <ul class="legend figure-legend">{legend}</ul>}
      <figcaption>{caption}</figcaption>
      {trouble.value && <p role="alert">{trouble.value}</p>}
    </figure>
  );
}

function SaveButton({ title, kind, onClick }: { title: string; kind: string; onClick(): void }) {
  return (
    <button type="button" class="quiet" onClick={onClick}>
      <SaveSign />
      <span class="unseen">Save {title} as </span>
      {kind}
    </button>
  );
}
