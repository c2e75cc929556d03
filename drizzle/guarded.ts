/**
 * MariaDB commits each change of a table at once and takes none of them back, so a migration that was cut off has run in
 * part and is run again from its beginning. Therefore every statement has to be one that may run twice. drizzle-kit writes
 * none of the guards and no character set (a server may prefer latin1): they are put in here, after `npm run db:generate`.
 */
export const breakpoint = '--> statement-breakpoint'

const charset = 'ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci'

const guards: readonly (readonly [RegExp, string])[] = [
  [/^CREATE TABLE `/, 'CREATE TABLE IF NOT EXISTS `'],
  [/^(CREATE TABLE [\s\S]*\n\));$/, `$1 ${charset};`],
  [/^CREATE (UNIQUE )?INDEX `/, 'CREATE $1INDEX IF NOT EXISTS `'],
  [/^DROP (TABLE|INDEX) `/, 'DROP $1 IF EXISTS `'],
  [/^(ALTER TABLE `\w+`) ADD `/, '$1 ADD COLUMN IF NOT EXISTS `'],
  [/^(ALTER TABLE `\w+`) ADD CONSTRAINT (`\w+`) FOREIGN KEY \(/, '$1 ADD CONSTRAINT $2 FOREIGN KEY IF NOT EXISTS ('],
  [/^(ALTER TABLE `\w+`) ADD CONSTRAINT (`\w+`) UNIQUE\(/, '$1 ADD UNIQUE INDEX IF NOT EXISTS $2 ('],
  [/^(ALTER TABLE `\w+`) DROP (COLUMN|FOREIGN KEY|INDEX) `/, '$1 DROP $2 IF EXISTS `'],
]

/** What may run twice: guarded, replacing, giving a column its final form, or changing rows to what they should be. */
const repeatable =
  /^(CREATE (UNIQUE )?(TABLE|INDEX|TRIGGER) IF NOT EXISTS|CREATE OR REPLACE|DROP (TABLE|INDEX|TRIGGER) IF EXISTS|ALTER TABLE `?\w+`? (ADD COLUMN IF NOT EXISTS|ADD CONSTRAINT `\w+` FOREIGN KEY IF NOT EXISTS|ADD UNIQUE INDEX IF NOT EXISTS|DROP (COLUMN|FOREIGN KEY|INDEX) IF EXISTS|MODIFY COLUMN)|UPDATE|DELETE|INSERT IGNORE)\b/

/** True for a statement that may run twice; whether an UPDATE does the second time what it did the first, its author knows. */
export const mayRunTwice = (statement: string): boolean => repeatable.test(statement.trim())

/**
 * A migration file with its guards. One that has them already stays as it is, to the byte.
 *
 * @throws {Error} naming the statement that no guard is known for: write it by hand.
 */
export function guarded(file: string): string {
  return file
    .split(breakpoint)
    .map((piece) => {
      const statement = piece.trim()
      const safe = guards.reduce((text, [pattern, guard]) => text.replace(pattern, guard), statement)
      if (!mayRunTwice(safe)) throw new Error(`This statement may not run twice:\n${statement}`)
      return piece.replace(statement, () => safe)
    })
    .join(breakpoint)
}
