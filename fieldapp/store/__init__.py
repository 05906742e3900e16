"""The store: one folder that holds every record, photo and account; all SQL is here, and every write to that folder.

It may import the records, the report's view of a job, sqlite-utils, Pillow and werkzeug's password hashes; never flask.
What it acknowledges is on the disk.
"""
