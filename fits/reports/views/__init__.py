"""Pages of results: of an assessment, of a report, of a report behind a share link."""
