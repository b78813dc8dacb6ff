"""The commands: each file one, with its arguments, its help and how it is carried out.

Nothing heavy is imported before a command is carried out: ``--help`` answers at once.
"""
