"""Stock sheets: untrusted CSV and XLSX files in, entries or findings out."""
