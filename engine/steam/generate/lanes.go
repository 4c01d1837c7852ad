package main

import (
	"bytes"
	"fmt"
	"math"
)

// lanes writes kernels for four points at a time in the AVX instructions of
// amd64, with the same operations in the same order as the scalar form, so that
// both give the same digits.
func lanes(list []kernel) (assembly, declarations []byte) {
	var code, doors bytes.Buffer
	code.WriteString(header + "#include \"textflag.h\"\n")
	doors.WriteString(header + "package steam\n")
	for _, k := range list {
		if k.lanes {
			newRegisters(k).write(&code)
			fmt.Fprintf(&doors, "\n// %sLanes writes %s of n points, a multiple of 4, as %s does of one.\n//\n//go:noescape\nfunc %sLanes(%s, %s, %s *float64, n int)\n",
				k.name, k.results[0], k.name, k.name, k.inputs[0], k.inputs[1], k.results[0])
		}
	}
	return code.Bytes(), doors.Bytes()
}

const (
	registerCount = 16
	laneBytes     = 32 // of four numbers
)

// registers gives the values of a kernel their places: registers while they
// last, else the stack, from the value whose next use is furthest.
type registers struct {
	k        kernel
	code     bytes.Buffer
	uses     [][]int // of each value, the steps that use it and are still to come
	in       [registerCount]int
	at       []int // register of each value, -1 for none
	stacked  []int // place on the stack of each value, -1 for none
	stack    int
	numbers  []float64
	numbered map[float64]int
}

const nobody = -1

func newRegisters(k kernel) *registers {
	n := len(k.formula.steps)
	r := &registers{k: k, uses: make([][]int, n), at: make([]int, n), stacked: make([]int, n), numbered: map[float64]int{}}
	for i := range r.in {
		r.in[i] = nobody
	}
	used := k.formula.used()
	for i, s := range k.formula.steps {
		r.at[i], r.stacked[i] = nobody, nobody
		if !used[i] {
			continue
		}
		for _, v := range s.operands() {
			r.uses[v] = append(r.uses[v], i)
		}
	}
	last := k.formula.results[0]
	r.uses[last] = append(r.uses[last], n)
	return r
}

// operands are the values that a step takes.
func (s step) operands() []int {
	switch s.operation {
	case input, constant:
		return nil
	case weighted:
		return []int{s.a, s.b, s.c}
	}
	return []int{s.a, s.b}
}

func (r *registers) emit(format string, parts ...any) {
	fmt.Fprintf(&r.code, "\t"+format+"\n", parts...)
}

// place names a value as an operand: a register, or memory.
func (r *registers) place(v int) string {
	s := r.k.formula.steps[v]
	switch {
	case r.at[v] != nobody:
		return fmt.Sprintf("Y%d", r.at[v])
	case s.operation == constant:
		at, ok := r.numbered[s.number]
		if !ok {
			at = len(r.numbers)
			r.numbered[s.number] = at
			r.numbers = append(r.numbers, s.number)
		}
		return fmt.Sprintf("%sNumbers<>+%d(SB)", r.k.name, at*laneBytes)
	case s.operation == input:
		return map[string]string{r.k.inputs[0]: "(SI)", r.k.inputs[1]: "(DI)"}[s.name]
	}
	return fmt.Sprintf("%d(SP)", r.stacked[v])
}

// free finds a register, none of those kept, and makes room in it.
func (r *registers) free(kept ...int) int {
	furthest, best := -1, nobody
	for i, v := range r.in {
		if v == nobody {
			return i
		}
		isKept := false
		for _, k := range kept {
			isKept = isKept || v == k
		}
		if !isKept && r.uses[v][0] > furthest {
			furthest, best = r.uses[v][0], i
		}
	}
	v := r.in[best]
	if s := r.k.formula.steps[v]; r.stacked[v] == nobody && s.operation != constant && s.operation != input {
		r.stacked[v] = r.stack
		r.stack += laneBytes
		r.emit("VMOVUPD Y%d, %d(SP)", best, r.stacked[v])
	}
	r.at[v], r.in[best] = nobody, nobody
	return best
}

func (r *registers) hold(v, register int) { r.in[register], r.at[v] = v, register }

// load brings a value into a register.
func (r *registers) load(v int, kept ...int) {
	if r.at[v] != nobody {
		return
	}
	register := r.free(kept...)
	r.emit("VMOVUPD %s, Y%d", r.place(v), register)
	r.hold(v, register)
}

// done drops a step's use of its operands, and those without another use.
func (r *registers) done(operands []int) {
	for _, v := range operands {
		r.uses[v] = r.uses[v][1:]
		if len(r.uses[v]) == 0 && r.at[v] != nobody {
			r.in[r.at[v]], r.at[v] = nobody, nobody
		}
	}
}

var mnemonics = map[operation]string{add: "VADDPD", subtract: "VSUBPD", multiply: "VMULPD", divide: "VDIVPD"}

// binary emits a op b into the register that it returns.
func (r *registers) binary(o operation, a, b int, kept []int) int {
	if (o == add || o == multiply) && r.at[a] == nobody && r.at[b] != nobody {
		a, b = b, a
	}
	r.load(a, kept...)
	first, second := r.place(a), r.place(b)
	into := r.free(kept...)
	// free may have moved an operand that is not kept; operands always are.
	r.emit("%s %s, %s, Y%d", mnemonics[o], second, first, into)
	return into
}

func (r *registers) write(out *bytes.Buffer) {
	f := r.k.formula
	used := f.used()
	for i, s := range f.steps {
		if !used[i] || s.operation == input || s.operation == constant {
			continue
		}
		operands := s.operands()
		var into int
		if s.operation == weighted {
			into = r.binary(multiply, s.a, s.b, operands)
			// Rounded apart, as the scalar form does.
			r.in[into] = i // keeps the product while the sum finds its operand
			r.emit("VADDPD %s, Y%d, Y%d", r.place(s.c), into, into)
		} else {
			into = r.binary(s.operation, s.a, s.b, operands)
		}
		r.in[into] = nobody
		r.done(operands)
		if len(r.uses[i]) > 0 {
			r.hold(i, into)
		}
	}
	result := f.results[0]
	r.load(result)
	name := r.k.name
	fmt.Fprintf(out, "\n// func %sLanes(%s, %s, %s *float64, n int)\nTEXT ·%sLanes(SB), 0, $%d-32\n", name, r.k.inputs[0], r.k.inputs[1], r.k.results[0], name, r.stack)
	fmt.Fprintf(out, "\tMOVQ %s+0(FP), SI\n\tMOVQ %s+8(FP), DI\n\tMOVQ %s+16(FP), DX\n\tMOVQ n+24(FP), CX\n", r.k.inputs[0], r.k.inputs[1], r.k.results[0])
	out.WriteString("next:\n\tCMPQ CX, $4\n\tJLT done\n")
	out.Write(r.code.Bytes())
	fmt.Fprintf(out, "\tVMOVUPD %s, (DX)\n", r.place(result))
	out.WriteString("\tADDQ $32, SI\n\tADDQ $32, DI\n\tADDQ $32, DX\n\tSUBQ $4, CX\n\tJMP next\ndone:\n\tVZEROUPPER\n\tRET\n\n")
	for i, v := range r.numbers {
		for lane := range laneBytes / 8 {
			fmt.Fprintf(out, "DATA %sNumbers<>+%d(SB)/8, $%#016x\n", name, i*laneBytes+8*lane, math.Float64bits(v))
		}
	}
	fmt.Fprintf(out, "GLOBL %sNumbers<>(SB), RODATA|NOPTR, $%d\n", name, len(r.numbers)*laneBytes)
}
