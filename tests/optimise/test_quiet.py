"""Standard output is off inside and on again after, however threads come and go."""

from __future__ import annotations

import ctypes
import os
import sys
import threading

import pytest

from blendapp.optimise.quiet import quiet


def test_what_is_written_inside_goes_nowhere_and_after_it_is_seen(capfd: pytest.CaptureFixture[str]) -> None:
    with quiet():
        os.write(1, b"inside\n")
    os.write(1, b"after\n")
    assert capfd.readouterr().out == "after\n"


@pytest.mark.skipif(sys.platform != "linux", reason="finds stdout of the C library by its name there")
def test_what_c_code_keeps_in_its_buffer_does_not_come_out_later(capfd: pytest.CaptureFixture[str]) -> None:
    c = ctypes.CDLL(None)
    c.setvbuf(ctypes.c_void_p.in_dll(c, "stdout"), None, 0, 4096)  # 0: written when full, as into a pipe
    with quiet():
        c.puts(b"kept back")
    c.fflush(None)
    assert capfd.readouterr().out == ""


def test_output_comes_back_when_two_threads_leave_in_the_order_in_which_they_came(
    capfd: pytest.CaptureFixture[str],
) -> None:
    second_in, first_out = threading.Event(), threading.Event()

    def first() -> None:
        with quiet():
            second_in.wait(10)

    def second() -> None:
        with quiet():
            second_in.set()
            first_out.wait(10)

    one, two = threading.Thread(target=first), threading.Thread(target=second)
    one.start()
    two.start()
    one.join()
    os.write(1, b"one is still inside\n")
    first_out.set()
    two.join()
    os.write(1, b"both out\n")
    assert capfd.readouterr().out == "both out\n"
