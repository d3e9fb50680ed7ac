"""What a timing circuit needs beside its timing parts, picked from the same stock."""
