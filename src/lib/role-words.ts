import type { MemberRole } from '#shared/api/roles.ts'

export const roleWord: Record<MemberRole, string> = {
  reader: 'Reader',
  contributor: 'Contributor',
  maintainer: 'Maintainer',
}

/** What a role allows, as one line of consequence beside every choice of it. */
export const roleAllows: Record<MemberRole, string> = {
  reader: 'reads every page of the group, drafts too; changes nothing',
  contributor: 'reads, makes pages, edits drafts and sends them for review; approves nothing',
  maintainer: 'edits and sends, approves and withdraws what others wrote, looks after the people',
}

export const roleOptions = (['reader', 'contributor', 'maintainer'] as const).map((value) => ({
  value,
  label: roleWord[value],
}))
