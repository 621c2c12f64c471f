"""The pace: coarse while something moves, fine at rest, fine throughout on a fast machine."""

from gui.pace import Pace


def test_fine_at_rest_coarse_while_moving_fine_again(qtbot):
    pace = Pace()
    assert pace.is_fine
    with qtbot.waitSignal(pace.rested, timeout=2000):
        pace.move()
        assert pace.is_moving
        assert not pace.is_fine
    assert pace.is_fine
    assert not pace.is_moving


def test_a_fast_machine_stays_fine_while_moving(qtbot):
    pace = Pace()
    pace.frame(5.0, fine=True)
    pace.move()
    assert pace.is_fine
    for _ in range(20):
        pace.frame(60.0, fine=True)
    assert not pace.is_fine
    pace.stop()


def test_coarse_frames_teach_nothing_about_fine_ones(qtbot):
    pace = Pace()
    pace.frame(1.0, fine=False)
    pace.move()
    assert not pace.is_fine
    pace.stop()
