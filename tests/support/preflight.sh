#!/bin/sh
# Is the file valid PDF/A-1b? By PDFBox Preflight 2.0.27 (packages libpdfbox2-java, libjaxb-api-java, libactivation-java).
jars=/usr/share/java
exec java -cp "$jars/preflight.jar:$jars/pdfbox2.jar:$jars/xmpbox.jar:$jars/fontbox2.jar:$jars/commons-logging.jar:$jars/jaxb-api.jar:$jars/javax.activation.jar" \
	org.apache.pdfbox.preflight.Validator_A1b "$1"
