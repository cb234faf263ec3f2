const page = document.documentElement;
const theme = document.getElementById('theme');

/** Whether the page is dark now. */
const dark = () => (page.dataset.theme ? page.dataset.theme === 'dark' : matchMedia('(prefers-color-scheme: dark)').matches);

const nameTheme = () => { theme.textContent = dark() ? 'Light page' : 'Dark page'; };

theme.addEventListener('click', () => {
  page.dataset.theme = dark() ? 'light' : 'dark';
  nameTheme();
});
nameTheme();

if (matchMedia('(max-width: 1099px)').matches) document.getElementById('toc').open = false;
addEventListener('beforeprint', () => all('details').forEach((e) => { e.open = true; }));
