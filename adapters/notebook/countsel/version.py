# adapters/notebook/countsel/version.py -- the package's version: the engine's, since they are one project.
__version__ = "0.1.0"
