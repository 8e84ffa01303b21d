// Package results puts the files of a run into a folder so that nobody ever finds
// half of them there and takes it for the whole.
//
// Start with Open, before anything is computed: it refuses a folder that cannot take
// the results. Folder.Write then writes the files aside, makes sure that they are on
// disk, and moves them into place: a new folder in one go, an existing one with
// summary.json last, which is the mark of results that are whole. If an operation
// fails, those before it are taken back. All of them go through a Disk.
package results
