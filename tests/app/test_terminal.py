"""The commands that open the app, where there is no terminal."""

import subprocess
import sys


def call(*arguments, cwd):
    """Run a command without a terminal."""
    return subprocess.run(
        [sys.executable, "-m", "digestplan", *arguments],
        capture_output=True,
        text=True,
        check=False,
        cwd=cwd,
        stdin=subprocess.DEVNULL,
    )


def test_without_a_terminal_another_command_is_named(tmp_path, tendon):
    """`digestplan` and `digestplan open` say what to use instead, with status 2."""
    for arguments in ((), ("open", str(tendon))):
        done = call(*arguments, cwd=tmp_path)

        assert done.returncode == 2
        assert "digestplan forecast PLAN" in done.stderr
        assert done.stdout == ""


def test_the_demo_is_copied_and_never_over_ones_own_work(tmp_path):
    """The demo plans come into the folder; a file that is there already is kept."""
    own = tmp_path / "d" / "seal-skin-37.toml"
    own.parent.mkdir()
    own.write_text("mine", "utf-8")

    done = call("demo", "d", cwd=tmp_path)

    assert done.returncode == 2
    assert own.read_text("utf-8") == "mine"
    assert (tmp_path / "d" / "porpoise-tendon-overnight.toml").is_file()
