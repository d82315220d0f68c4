import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { AxeResults, RunOptions } from 'axe-core';
import { sizes } from './visit';
import type { Visit } from './visit';

const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

/**
 * What axe-core finds serious or critical, as "rule: selector" lines.
 *
 * @param what colours: only what depends on the colours, for a page whose structure was looked at before
 */
export async function seriousFindings(visit: Visit, what: 'all' | 'colours' = 'all'): Promise<string[]> {
  const { page } = visit;
  await page.evaluate(axeSource);
  const options: RunOptions = {
    resultTypes: ['violations'],
    ...(what === 'colours'
      ? { runOnly: { type: 'rule', values: ['color-contrast', 'link-in-text-block'] } }
      : {}),
  };
  const { violations, passes } = await page.evaluate(
    (given) =>
      (globalThis as unknown as { axe: { run(root: Document, o: unknown): Promise<AxeResults> } }).axe.run(
        document,
        given,
      ),
    options as object,
  );
  // An axe that looked at nothing would find nothing.
  if (passes.length === 0) throw new Error('axe-core checked nothing');
  return violations
    .filter(({ impact }) => impact === 'serious' || impact === 'critical')
    .flatMap(({ id, nodes }) =>
      nodes.map((node) => `${id}: ${node.target.join(' ')} ${node.any[0]?.message ?? ''}`),
    );
}

/** How far the document, or anything that is not scrolled inside a part of its own, reaches beyond the window [px]. */
export function sidewaysPx(visit: Visit): Promise<number> {
  return visit.page.evaluate(
    (width) => Math.max(document.documentElement.scrollWidth, document.body.scrollWidth) - width,
    sizes[visit.size].width,
  );
}

export function headingCount(visit: Visit): Promise<number> {
  return visit.page.locator('h1').count();
}
