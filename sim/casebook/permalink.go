package casebook

import (
	"bytes"
	"compress/flate"
	"encoding/base64"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"strings"
)

// Limits of a code.
const (
	MaxCode = 64 << 10 // characters
	MaxJSON = 1 << 20  // bytes once unpacked
)

// Code returns the casebook as text for a link: the version, then base64url of the deflated compact JSON behind the
// four bytes of its CRC-32, so that a code that was altered on its way is noticed.
func (c Casebook) Code() (string, error) {
	plain, err := c.Compact()
	if err != nil {
		return "", err
	}
	var packed bytes.Buffer
	sum := crc32.ChecksumIEEE(plain)
	packed.Write([]byte{byte(sum >> 24), byte(sum >> 16), byte(sum >> 8), byte(sum)})
	w, err := flate.NewWriter(&packed, flate.BestCompression)
	if err != nil {
		return "", err
	}
	if _, err = w.Write(plain); err != nil {
		return "", err
	}
	if err = w.Close(); err != nil {
		return "", err
	}
	code := fmt.Sprint(Version) + "." + base64.RawURLEncoding.EncodeToString(packed.Bytes())
	if len(code) > MaxCode {
		return "", fmt.Errorf("the link would be %d characters long; %d are allowed. Save a case file instead", len(code), MaxCode)
	}
	return code, nil
}

// Decode reads a code, or a whole address that ends in one. Every failure is a sentence.
func Decode(text string) (Casebook, error) {
	var none Casebook
	text = strings.TrimSpace(text)
	if at := strings.LastIndex(text, "#c="); at >= 0 {
		text = text[at+3:]
	}
	text, _, _ = strings.Cut(text, "&") // what follows says how to look at it
	if len(text) > MaxCode {
		return none, fmt.Errorf("the code is %d characters long; %d are allowed", len(text), MaxCode)
	}
	version, body, found := strings.Cut(text, ".")
	if !found || version == "" || strings.Trim(version, "0123456789") != "" {
		return none, errors.New("this is not a Preponder code: it must begin with its version and a dot, like 1.")
	}
	if version != fmt.Sprint(Version) {
		return none, fmt.Errorf("this code is of version %s; this program reads version %d", version, Version)
	}
	packed, err := base64.RawURLEncoding.DecodeString(body)
	if err != nil || len(packed) < 5 {
		return none, errors.New("the code is cut off or holds characters that do not belong in it; copy it again, whole")
	}
	plain, err := io.ReadAll(io.LimitReader(flate.NewReader(bytes.NewReader(packed[4:])), MaxJSON+1))
	if len(plain) > MaxJSON {
		return none, fmt.Errorf("the code unpacks to more than %d bytes, which is not allowed", MaxJSON)
	}
	if err != nil {
		return none, errors.New("the code is cut off or was altered on its way; copy it again, whole")
	}
	sum := crc32.ChecksumIEEE(plain)
	if !bytes.Equal(packed[:4], []byte{byte(sum >> 24), byte(sum >> 16), byte(sum >> 8), byte(sum)}) {
		return none, errors.New("the code was altered on its way: its check sum does not fit; copy it again, whole")
	}
	return Read(plain)
}
