"""Files: whole or none."""

import pytest

from lamwright.geometry.whole_file import write_text


def test_a_failed_write_leaves_the_old_file(tmp_path):
    """Half of a text that cannot be encoded must not replace a good file."""
    path = tmp_path / "a.json"
    write_text(path, "old")
    with pytest.raises(UnicodeEncodeError):
        write_text(path, "x" * 100_000 + "\ud800")
    assert path.read_text() == "old"
    assert list(tmp_path.iterdir()) == [path]
