"""Tests of fabgen. One linear algebra thread, as the command line sets it, before anything imports numpy."""

from fabgen.resources import one_linear_algebra_thread

one_linear_algebra_thread()
