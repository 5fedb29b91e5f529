import { useEffect, useState } from 'react';
import { meSchema, type Me } from '@/domain/api/people.ts';
import { api } from '@/components/live/api.ts';

/** For people who belong to several organisations: which one they work in now. Shows nothing for everybody else. */
export default function OrganisationSwitch() {
  const [me, setMe] = useState<Me | null>(null);
  const [error, setError] = useState<string | null>(null);
  useEffect(() => {
    // Without an answer the person simply goes on where they are.
    api.get('/api/v1/me', meSchema).then(setMe, () => setMe(null));
  }, []);
  if (!me || me.organisations.length < 2) return null;
  const change = async (organisationId: string) => {
    try {
      await api.send('POST', '/api/v1/me/organisation', { organisationId });
      location.assign('/');
    } catch (problem) {
      setError(problem instanceof Error ? problem.message : 'The organisation could not be changed.');
    }
  };
  return (
    <label className="grid gap-1">
      <span className="text-[13px] font-medium">Work for</span>
      <select
        className="field"
        value={me.organisation.id}
        onChange={(event) => void change(event.target.value)}
      >
        {me.organisations.map((one) => (
          <option key={one.id} value={one.id}>
            {one.name}
          </option>
        ))}
      </select>
      {error && (
        <span role="alert" className="text-hull">
          {error}
        </span>
      )}
    </label>
  );
}
