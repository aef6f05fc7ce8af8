"""An independent dense search for planetary events, to check the finders against.

It shares no code with the package under test: JPL kernels are read by jplephem, the astronomy is
ERFA's, and every event is found by brute force on a step far shorter than a finder would choose.
"""
