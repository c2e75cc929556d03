// Runs before the first paint, so that a chosen appearance never flashes. A file of its own: the policy allows no
// inline script. The name of the stored choice is the one in src/lib/theme.ts.
try {
  const choice = localStorage.getItem('brinkbook.appearance')
  if (choice === 'light' || choice === 'dark') document.documentElement.dataset.theme = choice
} catch {
  // Storage is refused: the machine's own setting holds.
}
