// Before the first paint: the theme that this browser chose, or the system's. Then the switch in the person menu.
(() => {
  const root = document.documentElement;
  const chosen = () => {
    try {
      return localStorage.getItem('plimsoll-theme');
    } catch {
      return null;
    }
  };
  const apply = (theme) => {
    if (theme === 'paper' || theme === 'night') root.dataset.theme = theme;
    else delete root.dataset.theme;
    for (const button of document.querySelectorAll('[data-theme-choice]'))
      button.setAttribute('aria-pressed', String(button.dataset.themeChoice === (theme ?? 'system')));
    window.dispatchEvent(new Event('plimsoll-theme'));
  };
  apply(chosen());
  document.addEventListener('DOMContentLoaded', () => apply(chosen()));
  document.addEventListener('click', (event) => {
    const button = event.target instanceof Element && event.target.closest('[data-theme-choice]');
    if (button) {
      const theme = button.dataset.themeChoice;
      try {
        if (theme === 'system') localStorage.removeItem('plimsoll-theme');
        else localStorage.setItem('plimsoll-theme', theme);
      } catch {
        // A browser that keeps nothing still shows the choice on this page.
      }
      apply(theme === 'system' ? null : theme);
    }
    // A menu closes when the person looks elsewhere.
    for (const menu of document.querySelectorAll('details[data-menu][open]'))
      if (!menu.contains(event.target)) menu.open = false;
  });
  document.addEventListener('keydown', (event) => {
    if (event.key !== 'Escape') return;
    for (const menu of document.querySelectorAll('details[data-menu][open]')) {
      menu.open = false;
      menu.querySelector('summary')?.focus();
    }
  });
  matchMedia('(prefers-color-scheme: dark)').addEventListener('change', () => apply(chosen()));
})();
