"""The evidence: what the tests compare with the outside, recorded as they compare it.

A test that checks against print, a library or an independent calculation asserts through the
fixture ``evidence``, so that what the page shows is what was asserted, tolerance included.
``python -m tests.evidence --write`` runs those tests and writes the guide's page.
"""
