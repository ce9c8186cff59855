package fleet

import (
	"context"
	"errors"
	"strings"
	"sync/atomic"
	"testing"
)

func TestEachKeepsSlots(t *testing.T) {
	bad := errors.New("bad")
	var calls atomic.Int32
	errs := Each(context.Background(), 50, 4, func(_ context.Context, i int) error {
		calls.Add(1)
		switch {
		case i == 7:
			panic("seven")
		case i%10 == 3:
			return bad
		}
		return nil
	})
	if calls.Load() != 50 || len(errs) != 50 {
		t.Fatalf("%d calls, %d slots", calls.Load(), len(errs))
	}
	for i, err := range errs {
		switch {
		case i == 7:
			if err == nil || !strings.Contains(err.Error(), "seven") {
				t.Errorf("slot 7: %v, want the panic", err)
			}
		case i%10 == 3:
			if !errors.Is(err, bad) {
				t.Errorf("slot %d: %v", i, err)
			}
		case err != nil:
			t.Errorf("slot %d: %v", i, err)
		}
	}
}

func TestEachStopsWithContext(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	ran := 0
	errs := Each(ctx, 5, 1, func(context.Context, int) error {
		ran++
		cancel()
		return nil
	})
	if ran != 1 {
		t.Errorf("%d ran after the end of the context, want 1", ran)
	}
	if !errors.Is(errs[4], context.Canceled) {
		t.Errorf("slot 4: %v, want the context's error", errs[4])
	}
}

func TestEachOfNone(t *testing.T) {
	if errs := Each(context.Background(), 0, 0, nil); len(errs) != 0 {
		t.Errorf("%v", errs)
	}
}
