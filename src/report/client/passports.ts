/** Passports of lines: sorted and filtered by native controls, opened where the address names one. */

type Order = readonly [key: string, label: string, isDescending: boolean]

const orders: readonly Order[] = [
  ['place', 'the order of the study', false],
  ['estimate', 'estimate, largest first', true],
  ['error', 'standard error, smallest first', false],
  ['p', 'p, smallest first', false],
  ['units', 'units, most first', true],
  ['doubts', 'checks in doubt, most first', true],
]

export function startPassports(): void {
  const list = document.querySelector<HTMLElement>('[data-passports]')
  if (!list) return
  const all = [...list.querySelectorAll<HTMLDetailsElement>('details.passport')]
  const words = all.map((one) => (one.querySelector('.name')?.textContent ?? '').toLowerCase())
  const find = document.createElement('input')
  find.type = 'search'
  const sort = document.createElement('select')
  for (const [key, label] of orders) sort.add(new Option(label, key))
  const told = document.createElement('p')
  told.className = 'note'
  told.setAttribute('role', 'status')
  const controls = document.createElement('div')
  controls.className = 'passport-controls'
  controls.append(
    labelled('Find', find),
    labelled('Sort by', sort),
    button('Open all shown', true),
    button('Close all', false),
  )
  list.before(controls, told)

  function button(text: string, isOpen: boolean): HTMLButtonElement {
    const made = document.createElement('button')
    made.type = 'button'
    made.textContent = text
    made.addEventListener('click', () => {
      for (const one of all) if (!one.hidden || !isOpen) one.open = isOpen
    })
    return made
  }

  const filter = () => {
    const wanted = find.value.trim().toLowerCase()
    let shown = 0
    all.forEach((one, i) => {
      one.hidden = !words[i].includes(wanted)
      if (!one.hidden) shown++
    })
    told.textContent = `${shown} of ${all.length} shown`
  }
  const arrange = () => {
    const [key, , isDescending] = orders[sort.selectedIndex] ?? orders[0]
    const numberOf = (one: HTMLElement) => Number(one.dataset[key] ?? Number.NaN)
    const sorted = [...all].sort((a, b) => {
      const [x, y] = [numberOf(a), numberOf(b)]
      // those without a number come last whichever way
      if (Number.isNaN(x) || Number.isNaN(y)) return Number(Number.isNaN(x)) - Number(Number.isNaN(y))
      return isDescending ? y - x : x - y
    })
    list.append(...sorted)
  }
  const follow = () => {
    const named = all.find(({ id }) => `#${id}` === location.hash)
    if (!named) return
    named.open = true
    named.hidden = false
    named.scrollIntoView()
  }
  find.addEventListener('input', filter)
  sort.addEventListener('change', arrange)
  window.addEventListener('hashchange', follow)
  filter()
  follow()
}

function labelled(text: string, control: HTMLElement): HTMLLabelElement {
  const label = document.createElement('label')
  label.append(`${text} `, control)
  return label
}
