// A few words for the first visit; gone for good once they are dismissed in this browser.
export function render({ model }) {
  const view = document.createElement("div")
  view.className = "live-view"
  let seen = false
  try { seen = localStorage.getItem("blendwright-seen") !== null } catch { seen = true /* could not be remembered */ }
  if (seen) return view
  const hint = view.appendChild(document.createElement("div"))
  hint.className = "first"
  hint.setAttribute("role", "note")
  const words = hint.appendChild(document.createElement("p"))
  words.textContent = model.words
  const button = hint.appendChild(document.createElement("button"))
  button.type = "button"
  button.className = "link"
  button.textContent = "Understood"
  button.addEventListener("click", () => {
    try { localStorage.setItem("blendwright-seen", "1") } catch { /* the next visit shows it again */ }
    hint.remove()
  })
  return view
}
