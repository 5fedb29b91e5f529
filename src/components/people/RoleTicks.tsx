import { roleNames, type Role } from '@/domain/vocabulary.ts';

const work: Record<Role, string> = {
  mix_engineer: 'uploads, submits, withdraws and delivers again',
  qc_operator: 'approves, rejects and waives',
  spec_owner: 'drafts and publishes specs, assigns them to channels',
  administrator: 'invites and removes members, gives roles',
};

interface Props {
  possible: readonly Role[];
  picked: readonly Role[];
  onChange(roles: Role[]): void;
  error?: string;
  /** Keeps ids apart where two stand on one page. */
  idPrefix: string;
}

/** Which roles somebody has, with what each of them does. */
export function RoleTicks({ possible, picked, onChange, error, idPrefix }: Props) {
  const toggle = (role: Role) =>
    onChange(
      picked.includes(role)
        ? picked.filter((r) => r !== role)
        : possible.filter((r) => r === role || picked.includes(r)),
    );
  return (
    <fieldset aria-describedby={error ? `${idPrefix}-error` : undefined}>
      <legend className="mb-1 text-[13px] font-medium">Roles</legend>
      <div className="grid gap-1.5">
        {possible.map((role) => (
          <label key={role} className="flex items-baseline gap-2">
            <input
              type="checkbox"
              className="translate-y-0.5"
              checked={picked.includes(role)}
              onChange={() => toggle(role)}
            />
            <span>
              {roleNames[role]} <span className="text-[13px] text-muted">{work[role]}</span>
            </span>
          </label>
        ))}
      </div>
      {error && (
        <p id={`${idPrefix}-error`} className="mt-1 text-[13px] text-hull">
          {error}
        </p>
      )}
    </fieldset>
  );
}
