/* Sets the theme before the first paint; a file of its own because the page allows no inline script. */
;(function () {
  var chosen = null
  try {
    chosen = localStorage.getItem('theme')
  } catch {
    /* storage may be closed; the system's choice serves */
  }
  var dark = chosen === 'dark' || (chosen !== 'light' && matchMedia('(prefers-color-scheme: dark)').matches)
  document.documentElement.dataset.theme = dark ? 'dark' : 'light'
})()
