import type { TagPage } from '../../../../shared/api/tags.js';
import type { TagFormat } from '../../../../shared/paper/sizes.js';
import { tagPaper } from '../../../../shared/paper/tag-paper.js';
import { PaperPages, WithPrintedCodes } from '../../../components/paper.js';
import { formatDate } from '../../../lib/format.js';

/** Tags as they are printed: the same marks at the same places as in the terminal's PDF. */
export function PrintedTags({ tags, format }: { tags: readonly TagPage[]; format: TagFormat }) {
  const names = tags.map(({ content }) => content.tag).join(', ');
  return (
    <WithPrintedCodes>
      {({ qr }) => (
        <PaperPages
          paper={tagPaper(
            tags.map((tag) => ({ tag, qr: qr(tag.url) })),
            format,
            formatDate,
          )}
          label={`Readiness ${tags.length === 1 ? 'tag' : 'tags'} ${names} as printed, with the QR code of the page that says whether it still stands`}
        />
      )}
    </WithPrintedCodes>
  );
}
