import './people-table.css';
import { Link } from 'react-router-dom';
import type { PersonRow } from '../../../../shared/api/people.js';
import { paths } from '../../../paths.js';
import { lastHereWords, stateWords } from './person-words.js';

/** Everybody, in the order in which they came; on a phone each row folds into a few lines. */
export function PeopleTable({ people, ownId }: { people: readonly PersonRow[]; ownId: string }) {
  return (
    <table className="people-table">
      <caption className="sr-only">People of the shop</caption>
      <thead>
        <tr>
          {['name', 'role', 'e-mail', 'standing', 'last here'].map((head) => (
            <th key={head} scope="col">
              {head}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>
        {people.map((person) => (
          <tr key={person.id} className={person.state === 'deactivated' ? 'is-out' : ''}>
            <td>
              <Link to={paths.person(person.id)}>
                {person.name}
                {person.id === ownId ? ' (you)' : ''}
              </Link>
            </td>
            <td>{person.role}</td>
            <td className="people-email">{person.email}</td>
            <td className="people-state">{stateWords(person)}</td>
            <td className="people-last">{lastHereWords(person)}</td>
          </tr>
        ))}
      </tbody>
    </table>
  );
}
