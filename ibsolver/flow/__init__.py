"""One time step of the flow: reads like the method section of a paper.

Takes the grid, bodies, motions and kernels; knows no case file, opens no file, prints nothing. A numerical failure
is a status in the `StepReport`, not an exception.
"""
