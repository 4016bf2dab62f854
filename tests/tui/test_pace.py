"""When frames may go: claims about the state of the line, with a clock of the tests' own."""

from specterm.tui.pace import AT_ONCE, DEAF, LONGEST, PER_SECOND, SLOW, Pace, behind_multiplexer


class Clock:
    """A clock that is put forward by hand."""

    def __init__(self):
        """Start at some time."""
        self.now = 100.0

    def __call__(self):
        """Return the time."""
        return self.now


def started(**options):
    """Return a pace and its clock."""
    clock = Clock()
    return Pace(clock=clock, **options), clock


def frame(pace):
    """Draw and send a frame."""
    pace.drawn()
    assert pace.sent()


def test_one_frame_is_on_its_way_at_a_time():
    """Once a terminal has answered, the next frame waits for the answer to the last, and goes with it."""
    pace, clock = started()
    frame(pace)
    pace.answered()
    assert pace.delay() == 0
    frame(pace)
    assert pace.delay() == LONGEST
    clock.now += SLOW / 2
    pace.answered()
    assert pace.delay() == 0


def test_a_silent_terminal_is_never_waited_for():
    """A terminal that has not answered delays no frame, however many are on their way."""
    pace, clock = started()
    for _ in range(50):
        frame(pace)
        assert pace.delay() == 0
        clock.now += 0.01


def test_a_terminal_that_falls_silent_is_given_up():
    """When an answer is overdue the next frame goes, and those after it too; an answer brings the waiting back."""
    pace, clock = started()
    frame(pace)
    pace.answered()
    frame(pace)
    clock.now += LONGEST
    assert pace.delay() == 0
    frame(pace)
    assert pace.delay() == 0
    pace.answered()
    frame(pace)
    assert pace.delay() > 0


def test_frames_are_counted_on_a_slow_line():
    """After slow answers a few frames go at once and then ten a second; a pause brings the few back."""
    pace, clock = started()
    frame(pace)
    clock.now += 2 * SLOW
    pace.answered()
    sent, end = 0, clock.now + 3
    while clock.now < end:
        if pace.delay() == 0:
            frame(pace)
            pace.answered()
            pace._slow = True
            sent += 1
        clock.now += 0.01
    assert 3 * PER_SECOND <= sent <= 3 * PER_SECOND + AT_ONCE
    clock.now += 1
    assert pace.delay() == 0


def test_a_fast_line_is_not_counted():
    """With quick answers hundreds of frames a second may go."""
    pace, clock = started()
    for _ in range(200):
        assert pace.delay() == 0
        frame(pace)
        clock.now += 0.002
        pace.answered()


def test_multiplexers_are_counted_however_fast_they_answer():
    """Inside a multiplexer frames are counted from the start."""
    pace, _ = started(careful=True)
    for _ in range(int(AT_ONCE)):
        assert pace.delay() == 0
        frame(pace)
        pace.answered()
    assert pace.delay() > 0
    assert behind_multiplexer({"TMUX": "x"})
    assert behind_multiplexer({"STY": "1.a"})
    assert behind_multiplexer({"TERM": "tmux-256color"})
    assert not behind_multiplexer({"TERM": "xterm-256color"})


def test_answers_owed_at_the_end():
    """An answer is owed by a terminal that answers, and by a new one for a while, not by one that never did."""
    pace, clock = started()
    assert not pace.owed
    frame(pace)
    assert pace.owed
    clock.now += DEAF
    frame(pace)
    assert not pace.owed
    pace.answered()
    assert pace.owed
    pace.answered()
    assert not pace.owed


def test_nothing_changed_asks_nothing():
    """A display that no frame was drawn for asks no question."""
    pace, _ = started()
    assert not pace.sent()


def test_unasked_answers_do_no_harm():
    """An answer that nobody asked for changes nothing but that the terminal answers."""
    pace, _ = started()
    pace.answered()
    assert pace.delay() == 0
    assert not pace.owed
