"""Edge windows and proposals for the digital nets of a board.

A library user needs two lines::

    from edgeplan import plan
    results = plan.plan("examples/saltmarsh")

The package head imports nothing, so that ``import edgeplan`` stays light.
"""

__version__ = "0.1.0"
