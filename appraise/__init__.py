"""Appraise the retrofit of a second district-heating condenser in a back-pressure steam CHP plant."""

__version__ = "0.1.0"
