"""What reaches a terminal or a pipe."""

import json

from core.command import terminal


def test_a_pipe_gets_exponents_in_columns_of_the_same_width():
    line = "a   −1.234×10⁻⁵    2.500   10¹¹ dyn/cm²"
    plain = terminal.plain_numbers(line)
    assert plain == "a     -1.234e-5    2.500   10¹¹ dyn/cm²"
    assert len(plain) == len(line)
    assert float(plain.split()[1]) == -1.234e-5


def test_control_characters_are_written_out_and_line_ends_kept():
    text = "a\x1b]0;b\x07\tc\r\nd\x7fe\u2066f\rg\n"
    safe = terminal.without_controls(text)
    assert safe == "a\\u001b]0;b\\u0007\tc\r\nd\\u007fe\\u2066f\\u000dg\n"
    document = json.dumps({"name": "a\x9bb\u202e"}, ensure_ascii=False)
    assert json.loads(terminal.without_controls(document)) == {"name": "a\x9bb\u202e"}


def test_a_sentence_takes_one_line_and_a_missing_stderr_is_no_error(capsys, monkeypatch):
    terminal.say("two\nlines\x1b")
    assert capsys.readouterr().err == "tricline: two lines\\u001b\n"
    monkeypatch.setattr("sys.stderr", None)
    terminal.say("nobody hears")
