"""The server's pages and calls: each parses, calls, and replies. No SQL, no formula."""
