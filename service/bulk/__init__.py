"""Long requests, about many postures or orientations: answered in pieces, in nobody's way.

Three formats in and out. Up to 2 MB of JSON and all tables are worked on by two threads that hand
out pieces; larger JSON, which can only be parsed while holding the interpreter, by one process.
"""
