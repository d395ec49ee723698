// Applies the stored theme before the first paint; 'system' follows the operating system.
(() => {
  const apply = () => {
    let choice = 'system';
    try { choice = localStorage.getItem('theme') ?? 'system'; } catch { /* storage may be refused: follow the system */ }
    const dark = choice === 'dark' || (choice === 'system' && matchMedia('(prefers-color-scheme: dark)').matches);
    document.documentElement.dataset.theme = dark ? 'dark' : 'light';
  };
  apply();
  matchMedia('(prefers-color-scheme: dark)').addEventListener('change', apply);
  addEventListener('themechange', apply);
})();
