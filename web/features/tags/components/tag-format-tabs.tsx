import { Link } from 'react-router-dom';
import { TAG_FORMATS, type TagFormat } from '../../../../shared/paper/sizes.js';

const WORDS: Record<TagFormat, string> = { a6: 'A6 card', '4x6': '4 x 6 in label', a4: 'four on A4', letter: 'four on letter' };

/** What the tag is printed on. */
export function TagFormatTabs({ format, linkTo }: { format: TagFormat; linkTo: (format: TagFormat) => string }) {
  return (
    <nav aria-label="Print it on" className="word-tabs mt-4 flex-wrap border-b border-line">
      {TAG_FORMATS.map((one) => (
        <Link key={one} to={linkTo(one)} replace preventScrollReset aria-current={one === format ? 'true' : undefined}>
          {WORDS[one]}
        </Link>
      ))}
    </nav>
  );
}
