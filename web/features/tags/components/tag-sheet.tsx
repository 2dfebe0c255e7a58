import './tag-sheet.css';
import type { TagContent, TagPage } from '../../../../shared/api/tags.js';
import { VerdictWord } from '../../../components/verdict.js';
import { formatDate } from '../../../lib/format.js';
import { QrCode } from './qr-code.js';
import { plateInWords, mendedInWords } from './tag-words.js';

function LampRow({ lamps }: { lamps: readonly boolean[] }) {
  const width = lamps.length * 11;
  return (
    <svg
      className="lamp-row"
      viewBox={`0 0 ${width} 10`}
      role="img"
      aria-label={`${lamps.filter(Boolean).length} of ${lamps.length} lamps blink together`}
    >
      {lamps.map((lit, index) => (
        <circle key={index} cx={index * 11 + 5} cy="5" r="3.8" fill={lit ? '#000' : 'none'} stroke="#000" strokeWidth="1.4" />
      ))}
    </svg>
  );
}

/** More rows than these go overleaf, so that caution and footer keep their place. */
const ROWS_ON_FRONT = 10;

function Outline() {
  return (
    <svg className="tag-outline" viewBox="0 0 105 148" aria-hidden="true">
      <path d="M15 2.5H90L102.5 15V145.5H2.5V15z" fill="none" stroke="#000" strokeWidth=".7" />
      <circle cx="52.5" cy="10.5" r="3" fill="none" stroke="#000" strokeWidth=".4" strokeDasharray="1.2 .8" />
      <path d="M47.5 10.5h2.4M55.1 10.5h2.4M52.5 5.5v2.4M52.5 13.1v2.4" stroke="#000" strokeWidth=".3" />
    </svg>
  );
}

/** The reading has its unit already: on paper the limit goes without. */
function limitOnPaper({ reading, limit }: TagContent['tested'][number]): string {
  const unit = reading.split(' ').at(-1) ?? '';
  return limit.endsWith(` ${unit}`) ? limit.slice(0, -unit.length - 1) : limit;
}

function TestedTable({ tested, heading }: { tested: TagContent['tested']; heading: string }) {
  return (
    <table>
      <thead>
        <tr>
          <th scope="col">{heading}</th>
          <th scope="col">reading</th>
          <th scope="col">limit</th>
          <th scope="col">verdict</th>
        </tr>
      </thead>
      <tbody>
        {tested.map((test) => (
          <tr key={test.title}>
            <td>{test.title}</td>
            <td>{test.lamps ? <LampRow lamps={test.lamps} /> : [test.reading, test.spread].filter(Boolean).join(' ')}</td>
            <td>{limitOnPaper(test)}</td>
            <td>
              <VerdictWord verdict={test.verdict} />
            </td>
          </tr>
        ))}
      </tbody>
    </table>
  );
}

/** The tag as it is printed: A6, black on white, one page. */
export function TagSheet({ tag }: { tag: TagPage }) {
  const { content } = tag;
  const overleaf = Math.max(0, content.tested.length - ROWS_ON_FRONT);
  return (
    <>
      <Front tag={tag} overleaf={overleaf} />
      {overleaf > 0 && (
        <section className="tag-sheet" aria-label={`Readiness tag ${content.tag}, overleaf`}>
          <Outline />
          <header>
            <p>overleaf</p>
            <p>
              tag<b>{content.tag}</b>
            </p>
          </header>
          <TestedTable tested={content.tested.slice(ROWS_ON_FRONT)} heading="tested" />
        </section>
      )}
    </>
  );
}

function Front({ tag, overleaf }: { tag: TagPage; overleaf: number }) {
  const { content } = tag;
  return (
    <section className="tag-sheet" aria-label={`Readiness tag ${content.tag}, as printed`}>
      <Outline />
      {content.sample && <p className="tag-sample">SAMPLE</p>}
      <header>
        <p className="ready-word">Ready</p>
        <p>
          tag<b>{content.tag}</b>
        </p>
      </header>
      <p className="machine">
        <b>
          {content.plate.maker} {content.plate.model}
        </b>{' '}
        {content.appliance}, serial <span className="mono">{content.plate.serial ?? 'unreadable'}</span>{' '}
        <span className="mono whitespace-nowrap">{plateInWords(content.plate)}</span>
      </p>
      <TestedTable tested={content.tested.slice(0, ROWS_ON_FRONT)} heading={content.mended.length > 0 ? 'tested after repair' : 'tested'} />
      {overleaf > 0 && <p>{overleaf} more overleaf.</p>}
      <div className="lower">
        <div>
          <p>
            <b>Mended:</b> {content.mended.length === 0 ? 'nothing had to be.' : content.mended.map(mendedInWords).join(' ')}
          </p>
          <p>
            <b>Signed off</b> {formatDate(content.signedOffAt)} by {content.signedOffBy}, lead.
            {!content.fourEyes && ' Four eyes switched off.'}
          </p>
          <p>
            <b>Warranty</b> {content.warrantyMonths} months from the day of sale.
          </p>
          <p className="by-pen">
            <span>sold on</span>
            <span />
          </p>
          <p className="by-pen">
            <span>until</span>
            <span />
          </p>
        </div>
        <div className="scan">
          <QrCode text={tag.url} alt={`QR code of the page that says whether tag ${content.tag} still stands`} />
          <p>
            Scan: does it still stand?
            <br />
            Or look up{' '}
            <b className="mono">
              {content.tag} {content.lookUpWord}
            </b>
          </p>
        </div>
      </div>
      <div className="care">
        <b>
          <svg viewBox="0 0 24 22" aria-hidden="true">
            <path fill="currentColor" fillRule="evenodd" d="M12 0 24 22H0zM10.6 7.5h2.8v7.2h-2.8zM10.6 16.4h2.8v2.8h-2.8z" />
          </svg>
          Caution
        </b>
        <span>{content.cautions.join(' ')}</span>
      </div>
      <footer>
        <p>
          <b>{content.shop.name}</b>, {content.shop.address}, <span className="mono">{content.shop.phone}</span>
        </p>
        <p>Says what this shop tested. Certifies no compliance.</p>
      </footer>
    </section>
  );
}
