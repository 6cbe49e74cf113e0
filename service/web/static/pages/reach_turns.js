// Whose turn it is: what somebody waits for goes first, what only adds to the picture comes last.
// Idea: the last question is asked when nothing else has been asked for a while, and is broken off
// and put back as soon as something is, or the page is left. Left out: what is asked.

const QUIET_MS = 400;

/**
 * Return what keeps the turns of a page. first: asked at once; touch: something is about to be asked;
 * last: asked when all is quiet, in place of the one before; drop: it is not wanted any more.
 */
export function turns() {
  const state = { open: 0, waiting: null, running: null, timer: 0, isLeft: false };
  const touch = () => {
    interrupt(state);
    settle(state);
  };
  addEventListener("pagehide", () => {
    state.isLeft = true;
    touch();
  });
  addEventListener("pageshow", () => {
    state.isLeft = false;
    settle(state);
  });
  return {
    touch,
    async first(question) {
      state.open += 1;
      touch();
      try {
        return await question();
      } finally {
        state.open -= 1;
        settle(state);
      }
    },
    last(question) {
      drop(state);
      state.waiting = question;
      settle(state);
    },
    drop: () => drop(state),
  };
}

function settle(state) {
  clearTimeout(state.timer);
  if (!state.open && !state.isLeft && state.waiting) state.timer = setTimeout(() => begin(state), QUIET_MS);
}

async function begin(state) {
  const running = { question: state.waiting, control: new AbortController() };
  Object.assign(state, { waiting: null, running });
  await running.question(running.control.signal);
  if (state.running === running) state.running = null;
}

function interrupt(state) {
  const { running } = state;
  if (!running) return;
  state.running = null;
  state.waiting ??= running.question;
  running.control.abort();
}

function drop(state) {
  interrupt(state);
  state.waiting = null;
}
