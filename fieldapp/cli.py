"""The command `bayreckon`: reads files and arguments, calls, and replies. Heavy libraries are imported where they are used."""
