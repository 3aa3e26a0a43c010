/** The columns of a file of entrants, as the page explains them. */
export const COLUMNS = [
  { name: 'name', needed: true, words: 'The entrant’s name.' },
  { name: 'tickets', needed: true, words: 'How many tickets they hold: a whole number, 1 or more.' },
  { name: 'email', needed: false, words: 'Where their receipt and the result go.' },
  { name: 'phone', needed: false, words: 'For those without e-mail.' },
  { name: 'numbers', needed: false, words: 'Your own ticket numbers, like 0101-0105, 0133.' },
  {
    name: 'label',
    needed: false,
    words: 'The words that announce them if they win. Left empty: first name and initial.',
  },
] as const

/** public/entrants-sample.csv, which the page shows; a test holds the two together. */
export const SAMPLE = `name,tickets,email,phone,numbers,label
Ottilie Brankscombe,5,ottilie@brankscombe.example,01632 960021,0101-0105,"Ottilie, Fernhill"
"Deng, Samuel",2,,01632 960144,"0106, 0107",
Priyanka Holt,12,p.holt@fernhill.example,,0108-0119,
Staff of the post office,20,,,,The staff of the post office
`
export const SAMPLE_PATH = '/entrants-sample.csv'
