package workbook

import (
	"archive/zip"
	"bytes"
	"sort"
)

// contentTypes is the part that the format wants to find first.
const contentTypes = "[Content_Types].xml"

// inOrder puts the parts of the file into a fixed order: streamed sheets come out of the library in a random one. The compressed
// bytes of each part are copied as they are.
func inOrder(file []byte) ([]byte, error) {
	in, err := zip.NewReader(bytes.NewReader(file), int64(len(file)))
	if err != nil {
		return nil, err
	}
	parts := append([]*zip.File(nil), in.File...)
	sort.Slice(parts, func(i, j int) bool {
		if first := parts[i].Name == contentTypes; first != (parts[j].Name == contentTypes) {
			return first
		}
		return parts[i].Name < parts[j].Name
	})
	var out bytes.Buffer
	out.Grow(len(file))
	writer := zip.NewWriter(&out)
	for _, part := range parts {
		if err := writer.Copy(part); err != nil {
			return nil, err
		}
	}
	if err := writer.Close(); err != nil {
		return nil, err
	}
	return out.Bytes(), nil
}
