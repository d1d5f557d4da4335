-- Which versions of which kinds of entry a book has is asked at every start: it is looked up and not counted.

-- +goose Up

CREATE INDEX entries_version ON entries (kind, v);
