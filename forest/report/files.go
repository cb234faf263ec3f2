package report

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"runtime"
	"sync"

	"steelyard/forest"
	"steelyard/forest/layout"
	"steelyard/forest/webpage"
	"steelyard/meta"
	"steelyard/meta/synthesis"
)

// File is a file of the report: its name below the report's folder, with "/" between
// folders, and its content.
type File struct {
	Name    string
	Content []byte
}

// PNG resolution of the figures, in dots per inch.
const figureDPI = 300

// figureTask is one file of figures to be drawn.
type figureTask struct {
	name string
	draw func(*bytes.Buffer) error
}

// Figures draws every chart of every outcome as SVG, PDF and PNG, 180 mm and 85 mm
// wide, in the colours of a theme. What cannot be drawn is left out; the page says why.
// The files are the same whatever the number of workers.
func Figures(ctx context.Context, s *synthesis.Synthesis, theme layout.Theme, work meta.Work) ([]File, error) {
	tasks := figureTasks(s, theme)
	workers := work.Workers
	if workers < 1 {
		workers = runtime.GOMAXPROCS(0)
	}
	files := make([]File, len(tasks))
	errs := make([]error, len(tasks))
	next := make(chan int)
	var group sync.WaitGroup
	var lock sync.Mutex
	done := 0
	for range min(workers, len(tasks)) {
		group.Go(func() {
			for i := range next {
				var out bytes.Buffer
				errs[i] = tasks[i].draw(&out)
				files[i] = File{tasks[i].name, out.Bytes()}
				lock.Lock()
				if done++; work.Progress != nil {
					work.Progress(done, len(tasks))
				}
				lock.Unlock()
			}
		})
	}
	for i := range tasks {
		if ctx.Err() != nil {
			break
		}
		next <- i
	}
	close(next)
	group.Wait()
	if err := errors.Join(append(errs, ctx.Err())...); err != nil {
		return nil, err
	}
	return files, nil
}

// figureTasks lays the charts out and lists their files.
func figureTasks(s *synthesis.Synthesis, theme layout.Theme) []figureTask {
	var tasks []figureTask
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if o.Result == nil {
			continue
		}
		for _, k := range webpage.Charts() {
			for _, width := range []struct {
				name   string
				points float64
			}{{"180mm", layout.WideWidth}, {"85mm", layout.NarrowWidth}} {
				d, err := k.Lay(s, o, layout.Style{Width: width.points})
				if err != nil {
					continue // the page says why
				}
				name := fmt.Sprintf("figures/%d-%s-%s", i+1, k.Name, width.name)
				tasks = append(tasks, drawings(name, d, theme)...)
			}
		}
	}
	return tasks
}

// drawings are the files of one chart: a PDF of all its pages, and images of each.
func drawings(name string, d layout.Document, theme layout.Theme) []figureTask {
	tasks := []figureTask{{name + ".pdf", func(out *bytes.Buffer) error { return forest.WritePDF(out, d, theme) }}}
	for i, sheet := range d.Pages {
		file := name
		if len(d.Pages) > 1 {
			file = fmt.Sprintf("%s-page%d", name, i+1)
		}
		tasks = append(tasks,
			figureTask{file + ".svg", func(out *bytes.Buffer) error { return forest.WriteSVG(out, sheet, theme) }},
			figureTask{file + ".png", func(out *bytes.Buffer) error { return forest.WritePNG(out, sheet, theme, figureDPI) }})
	}
	return tasks
}
