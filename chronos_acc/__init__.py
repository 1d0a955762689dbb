"""chronos_acc: is a list of milestones speeding up, and would the making of the list produce that by itself?"""

__version__ = "0.1.0"
