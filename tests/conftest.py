"""What holds for all tests."""

from lamwright.app.threads import hold_threads

# Two test processes on two cores: a second BLAS thread in each only doubles the processor time.
hold_threads()
