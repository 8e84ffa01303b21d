package main

import (
	"context"
	"io"

	"bankfire/cmd/bankfire/internal/results"
	"bankfire/paths"
)

// weighingFiles returns the files of a weighing, with rows of members from the parts,
// and puts their names into the summary, which is the first of them. Equal runs of one
// program make them with equal bytes, all but run.log.
func weighingFiles(ctx context.Context, r *paths.Result, from *parts, summary *weighing, log *runLog) []results.File {
	table := func(name string, write func(io.Writer, *paths.Result) error) results.File {
		return results.File{Name: name, Write: func(w io.Writer) error { return write(w, r) }}
	}
	files := []results.File{
		{Name: results.Summary, Write: func(w io.Writer) error { return writeJSON(w, summary) }},
		table("paths.csv", pathsTable),
		table("profiles.csv", profilesTable),
		table("points.csv", pointsTable),
	}
	files = append(files, memberFiles(ctx, r, from)...)
	for i, name := range figureNames(r) {
		files = append(files, results.File{Name: name, Write: func(w io.Writer) error { return writeFigure(w, r, i) }})
	}
	for i, name := range familyFigureNames(r) {
		if name != "" {
			files = append(files, results.File{Name: name, Write: func(w io.Writer) error { return writeFamilyFigure(w, r, i) }})
		}
	}
	files = append(files, table("run.log", log.write))
	for _, x := range files {
		summary.Files = append(summary.Files, x.Name)
	}
	return files
}

func writeFigure(w io.Writer, r *paths.Result, i int) error {
	picture, err := weighingFigure(r, i)
	if err != nil {
		return err
	}
	_, err = w.Write(picture)
	return err
}
