/** What the result may not be used for. */

import { html } from '../html.js';
import type { PageContext, Section } from './Section.js';

export function writeCautions(context: PageContext): Section {
  const reading =
    context.fit.model.order === 'first'
      ? html`<li>The drift is stated in the Itô reading; comparing it with another drift needs the same reading.</li>`
      : null;
  const body = html`<ul>
<li>The coefficients hold inside the visited region, for particles and sample conditions like the recorded ones: the same
medium, temperature, concentration and illumination. Outside, a line or a colour is a continuation and no finding.</li>
<li>Intervals speak of the scatter between recordings like this one. They do not cover errors shared by all tracks: a
wrong length scale, a drifting stage, mislinked tracks, a model of the wrong order.</li>
${reading}
<li>Nothing here is by itself a basis for dosing, for safe distances, for laser or heating settings, or for the control of
machines. Local rules and licensed practice come first.</li>
</ul>`;
  return { id: 'cautions', title: 'Cautions', body };
}
