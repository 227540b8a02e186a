package capture

import (
	"fmt"
	"math/rand/v2"
	"os"
	"strings"
	"syscall"
	"testing"
)

// TestStencilsStayInside: nothing is read from behind the end of a text, however wide its
// rows become: the memory behind it cannot be read.
func TestStencilsStayInside(t *testing.T) {
	const room = 1 << 16
	page := os.Getpagesize()
	memory, err := syscall.Mmap(-1, 0, room+page, syscall.PROT_READ|syscall.PROT_WRITE, syscall.MAP_ANON|syscall.MAP_PRIVATE)
	if err != nil {
		t.Fatal(err)
	}
	defer syscall.Munmap(memory)
	if err := syscall.Mprotect(memory[room:], syscall.PROT_NONE); err != nil {
		t.Fatal(err)
	}
	read := func(text string) {
		guarded := memory[room-len(text) : room : room]
		copy(guarded, text)
		h, refusal := newHead([]byte(text), true)
		if refusal != nil {
			return
		}
		d, refusal := design(h, Options{})
		if refusal != nil {
			return
		}
		s := &scanner{p: &d.plan, h: h, src: &source{meter: &meter{}}, store: store{columns: d.plan.values}, rowLen: 20}
		from := strings.Index(text, "\n") + 1
		d.plan.read(s.chunk(guarded[from:], 0), d.plan.worker())
	}
	for width := 1; width < 60; width++ {
		var b strings.Builder
		b.WriteString("t,V\n")
		for i := range 300 {
			fmt.Fprintf(&b, "%*.14f,%*.14f\n", width, float64(i-300)/300, width, -float64(i%7))
		}
		read(b.String())
	}
	for seed := range uint64(300) {
		read(printedRows(rand.New(rand.NewPCG(seed, 17))))
	}
}
