// How cards share the screen: so many in a row that the figures are largest while all cards are seen.
// Idea: a card is so many figures and lines high and so many figures wide, whatever it says, so nothing
// on the board moves when words come and go. Left out: elements (board.js) and what stands in a card.

const GAP_PX = 12;
const FRAME_PX = 8;
const WIDE = 5.85; // figures: eight characters, the letter of the axis and its unit
const HIGH = 3.2; // figures: three lines
const LINES = 10.3; // of words: head, nearest frame, sentence of two lines, block (as in board.css)
const WORDS_OF_FIGURE = [0.26, 0.34]; // at least, and where there is room
const WORDS_OF_CARD = 1 / 19.5; // at most: a name of 14 characters and a word beside it
const LEAST_WORDS_PX = 14;
const LEAST_PX = 26; // Smaller figures serve nobody across the hall: then the board scrolls.
const LEAST_CARD_PX = 240; // Below it, words do not fit on their lines.
const SCROLLED_CARD_PX = 300; // A board that scrolls shows as many as can be: names and a word beside.
const MOST_SHARE = 0.08; // of the screen, however few the arms
const MOST_AIR = 1.2; // Cards fill the screen, unless it is nearly empty.

/**
 * Return how cards are laid out.
 * @param {number} count of places @param {number} width @param {number} height there is, pixels
 * @param {number} [asked] columns, 0: as they fit
 * @returns {object} columns; figure, words: sizes of letters; high
 */
export function cardsFitted(count, width, height, asked = 0) {
  // More than have room for words would show none.
  asked = Math.min(asked, Math.max(Math.floor((width + GAP_PX) / (LEAST_CARD_PX + GAP_PX)), 1));
  const ways = asked ? [asked] : Array.from({ length: Math.max(count, 2) }, (_, i) => i + 1);
  let best = null;
  for (const columns of ways) {
    const rows = Math.ceil(count / columns);
    const across = cardWidth(width, columns), high = (height - (rows - 1) * GAP_PX) / rows;
    const figure = Math.min(ofWidth(across), ofHeight(high), MOST_SHARE * width);
    if (figure < LEAST_PX || across < LEAST_CARD_PX) continue;
    // Fewer columns, on which words have room, where figures are much the same.
    if (!best || figure > 1.05 * best.figure) best = { columns, figure, room: high };
  }
  const columns = asked || Math.max(Math.floor((width + GAP_PX) / (SCROLLED_CARD_PX + GAP_PX)), 1);
  best ??= { columns, figure: ofWidth(cardWidth(width, columns)) };
  const { figure, room = 0 } = best, [least, most] = WORDS_OF_FIGURE.map((share) => share * figure);
  const withRoom = (room - FRAME_PX - HIGH * figure) / LINES;
  const ofCard = cardWidth(width, best.columns) * WORDS_OF_CARD;
  const words = Math.max(LEAST_WORDS_PX, least, Math.min(withRoom, most, ofCard));
  const high = Math.ceil(FRAME_PX + HIGH * figure + LINES * words);
  return { columns: best.columns, figure, words, high: Math.max(high, Math.min(room, high * MOST_AIR)) };
}

const cardWidth = (width, columns) => (width - (columns - 1) * GAP_PX) / columns;
const ofWidth = (across) => (across - FRAME_PX) / WIDE;
// Words do not shrink with small figures: whichever of both leaves less.
const ofHeight = (high) => Math.min(
  (high - FRAME_PX) / (HIGH + LINES * WORDS_OF_FIGURE[0]), (high - FRAME_PX - LINES * LEAST_WORDS_PX) / HIGH);
