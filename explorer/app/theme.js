// Light or dark without a reload: the page takes CSS variables, Python the Bokeh theme. The choice is remembered.
export function render({ model }) {
  const view = document.createElement("div")
  view.className = "live-view"
  const bar = view.appendChild(document.createElement("div"))
  bar.className = "bar"
  const button = bar.appendChild(document.createElement("button"))
  button.type = "button"
  const show = () => {
    document.documentElement.dataset.theme = model.dark ? "dark" : "light"
    const hint = model.dark ? "Light colours" : "Dark colours"
    button.className = `press icon glyph-${model.dark ? "sun" : "moon"}`
    button.title = hint
    button.setAttribute("aria-label", hint)
  }
  let stored = null
  try { stored = localStorage.getItem("blendwright-theme") } catch { /* no storage: follow the system */ }
  const wanted = stored ? stored === "dark" : matchMedia("(prefers-color-scheme: dark)").matches
  model.on("dark", show)
  if (wanted !== model.dark) model.dark = wanted
  show()
  button.addEventListener("click", () => {
    model.dark = !model.dark
    try { localStorage.setItem("blendwright-theme", model.dark ? "dark" : "light") } catch { /* as above */ }
    show()
  })
  return view
}
