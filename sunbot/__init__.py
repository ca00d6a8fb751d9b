"""sunbot: will this panel, controller and battery carry this robot through the worst weeks of the place?"""

__version__ = "0.1.0"
