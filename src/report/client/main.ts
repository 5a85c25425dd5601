/** The page's one script: shows the panel that needs it, and sorts the passports of lines. */
import type { PanelData } from '../whatIfData.js'
import { modelOf } from './model.js'
import { startPanel } from './panel.js'
import { startPassports } from './passports.js'

startPassports()
const root = document.getElementById('what-if-panel')
const data = document.getElementById('what-if-data')
if (root && data) {
  for (const hidden of document.querySelectorAll('.needs-script')) hidden.removeAttribute('hidden')
  startPanel(root, modelOf(JSON.parse(data.textContent ?? '') as PanelData))
}
