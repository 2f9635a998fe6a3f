"""Certificates: lines measured by the checker's arithmetic, results, canonical files."""
