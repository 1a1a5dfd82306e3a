package workbook

import (
	"fmt"
	"math"
	"reflect"
	"strings"
)

// checkNumbers looks for numbers of the report that are not finite and did not reach a cell as a number: they might stand in words.
// The problem names the field as plan.json does.
func (b *book) checkNumbers(v reflect.Value, path string) {
	switch v.Kind() {
	case reflect.Pointer:
		if !v.IsNil() {
			b.checkNumbers(v.Elem(), path)
		}
	case reflect.Struct:
		for i := 0; i < v.NumField(); i++ {
			name, _, _ := strings.Cut(v.Type().Field(i).Tag.Get("json"), ",")
			b.checkNumbers(v.Field(i), strings.TrimPrefix(path+"."+name, "."))
		}
	case reflect.Slice:
		for i := 0; i < v.Len(); i++ {
			b.checkNumbers(v.Index(i), fmt.Sprintf("%s[%d]", path, i))
		}
	case reflect.Float64:
		if x := v.Float(); !(math.Abs(x) <= math.MaxFloat64) {
			b.fail("%s of the report is not a finite number", path)
		}
	}
}
